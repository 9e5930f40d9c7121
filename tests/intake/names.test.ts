import { describe, expect, it } from 'vitest'
import { fileNames } from '../../src/intake/names.ts'

const every = fileNames('**/*.{csv,txt,dx,jdx}')

describe('which names are an instrument’s files', () => {
  it.each(['a.csv', 'A.CSV', 'run 3/é=2.jdx', 'a/b/c/d.txt', 'x.tmp.csv'])('%s is one', (name) => {
    expect(every.matches(name)).toBe(true)
  })

  it.each(['a.pdf', 'csv', '.hidden.csv', '.sync/a.csv', '~$a.csv', '.~lock.a.csv', '#a.csv'])('%s is none', (name) => {
    expect(every.matches(name)).toBe(false)
  })

  it.each([
    'a.csv~',
    'a.csv.tmp',
    'a.TMP',
    'a.part',
    'a.csv.partial',
    'a.csv.crdownload',
    'd/a.filepart',
    'a.swp',
    '~a.csv',
  ])('%s looks temporary: a glob for everything does not mean it', (name) => {
    expect(fileNames('**/*').matches(name)).toBe(false)
  })

  it('a glob that names a temporary ending or a dot file means it', () => {
    expect(fileNames('*.{csv,tmp}').matches('a.tmp')).toBe(true)
    expect(fileNames('**/*.part').matches('d/a.part')).toBe(true)
    expect(fileNames('.export/*.csv').matches('.export/a.csv')).toBe(true)
    expect(fileNames('.export/*.csv').enters('.export')).toBe(true)
  })

  it('subfolders are entered only where the glob reaches into them', () => {
    expect(fileNames('*.csv').recursive).toBe(false)
    expect(fileNames('**/*.csv').recursive).toBe(true)
    expect(fileNames('2026/*.csv').recursive).toBe(true)
    expect(every.enters('.git')).toBe(false)
  })
})

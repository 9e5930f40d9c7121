import { mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { Command } from 'commander'
import { afterEach, describe, expect, it, vi } from 'vitest'
import { addLevels } from '../../src/commands/levels.ts'
import { EXIT, FaultError } from '../../src/fault.ts'
import { levelDiagram } from '../../src/pictures/levelDiagram.ts'

const run = (...args: readonly string[]): string => {
  let text = ''
  const write = vi.spyOn(process.stdout, 'write').mockImplementation((chunk) => {
    text += String(chunk)
    return true
  })
  try {
    const program = new Command().exitOverride()
    addLevels(program)
    program.parse(['node', 'tendq', 'levels', ...args])
  } finally {
    write.mockRestore()
  }
  return text
}

const faultOf = (...args: readonly string[]): FaultError => {
  try {
    run(...args)
  } catch (error) {
    if (error instanceof FaultError) return error
    throw error
  }
  throw new Error('nothing was refused')
}

afterEach(() => vi.restoreAllMocks())

describe('tendq levels', () => {
  it('prints one JSON object as the contract shows it, C 4.5 B unless given', () => {
    const lines = run('--ion', 'Cr3+', '--delta', '17400', '--b', '725', '--json').trim().split('\n')
    expect(lines).toHaveLength(1)
    const found = JSON.parse(lines[0]!)
    expect(found).toMatchObject({
      ion: 'Cr3+',
      d: 3,
      geometry: 'octahedral',
      delta_cm1: 17400,
      b_cm1: 725,
      c_cm1: 3262.5,
    })
    expect(found.levels[0]).toEqual({
      label: '4A2g',
      index: 1,
      multiplicity: 4,
      irrep: 'A2g',
      degeneracy: 4,
      energy_cm1: 0,
    })
    expect(found.levels.find((level: { label: string }) => level.label === '4T2g').energy_cm1).toBeCloseTo(17400, 8)
  })
  it('prints a table that marks the spin of the ground level', () => {
    const text = run('--ion', 'Cr(III)', '--delta', '17400', '--b', '725')
    expect(text).toMatch(/4T2g\(1\) \* +12 +17400\.0 +24\.000 +574\.7/)
    expect(text).toMatch(/2Eg\(1\) +4 /)
  })
  it('takes distortions and spin-orbit coupling, negative ones too', () => {
    expect(run('--ion', 'Cr3+', '--delta', '21000', '--b', '650', '--ds', '-200', '--dt', '300')).toContain('4B2g(1)')
    expect(run('--ion', 'Cr3+', '--delta', '21000', '--b', '650', '--dsigma', '200', '--dtau', '-30')).toContain(
      '4A1g(1)',
    )
    expect(run('--ion', 'Cr3+', '--delta', '21000', '--b', '650', '--zeta', '200')).toContain('Γ8(1)')
  })
  it('refuses with exit 64 and a worked example', () => {
    for (const [args, words] of [
      [['--ion', 'Cr4+', '--delta', '1', '--b', '1'], 'did you mean Cr3+'],
      [['--ion', 'Zn2+', '--delta', '1', '--b', '1'], 'd10'],
      [['--ion', 'Ti4+', '--delta', '1', '--b', '1'], 'd0'],
      [['--delta', '1', '--b', '1'], 'no ion'],
      [['--ion', 'Cr3+', '--b', '1'], 'no splitting'],
      [['--ion', 'Cr3+', '--delta', '1'], 'no Racah B'],
      [['--ion', 'Cr3+', '--delta', 'many', '--b', '1'], 'no number'],
      [['--ion', 'Cr3+', '--delta', '-17400', '--b', '725'], 'positive in every geometry'],
      [['--ion', 'Cr3+', '--delta', '17400', '--b', 'Infinity'], 'no number'],
      [['--ion', 'Cr3+', '--delta', '17400', '--b', '725', '--ds', '1', '--dtau', '1'], 'together'],
    ] as const) {
      const error = faultOf(...args)
      expect(error.exit).toBe(EXIT.usage)
      expect(error.message).toContain(words)
      expect(error.message).toContain('tendq levels --ion Cr3+ --delta 17400 --b 725')
    }
  })
  it('writes the diagram, and says where it could not', () => {
    const folder = mkdtempSync(join(tmpdir(), 'levels-'))
    try {
      run('--ion', 'Co3+', '--delta', '22900', '--b', '620', '--diagram', join(folder, 'd6.svg'))
      expect(readFileSync(join(folder, 'd6.svg'), 'utf8')).toMatch(/^<svg [^>]*>[\s\S]*<\/svg>\n$/)
      const error = faultOf(
        '--ion',
        'Co3+',
        '--delta',
        '22900',
        '--b',
        '620',
        '--diagram',
        join(folder, 'no', 'd6.svg'),
      )
      expect(error.exit).toBe(EXIT.io)
    } finally {
      rmSync(folder, { recursive: true })
    }
  })
})

describe('level diagram', () => {
  const d6 = levelDiagram({
    ion: 'Co3+',
    d: 6,
    geometry: 'octahedral',
    cOverB: 4.8,
    upToDeltaOverB: 40,
    markDeltaOverB: 35,
  })
  it('marks where the ground term of d6 changes, at Δ/B 20.02 for C/B 4.8', () => {
    expect(d6).toMatch(/→.* at 20\.02</)
  })
  it('sets levels of the ground spin apart by stroke, not by colour', () => {
    expect(d6).toContain('stroke-dasharray="5 3"')
    const colours = new Set([...d6.matchAll(/#([0-9a-f]{6})/g)].map(([, hex]) => hex!))
    for (const hex of colours) {
      const parts = [0, 2, 4].map((i) => Number.parseInt(hex.slice(i, i + 2), 16))
      expect(Math.max(...parts) - Math.min(...parts)).toBeLessThan(24) // nearly grey: it prints as it looks
    }
  })
  it('holds only finite coordinates and names that do not overlap', () => {
    for (let d = 1; d <= 9; d += 1) {
      const svg = levelDiagram({
        ion: 'M',
        d,
        geometry: 'tetrahedral',
        cOverB: 4.5,
        upToDeltaOverB: 30,
        markDeltaOverB: null,
      })
      expect(svg).not.toMatch(/NaN|Infinity|undefined/)
      for (const left of [670, 714]) {
        const places = [...svg.matchAll(new RegExp(`<text x="${left}" y="([-\\d.]+)"`, 'g'))].map(([, y]) => Number(y))
        const sorted = places.sort((a, b) => a - b)
        for (let i = 1; i < sorted.length; i += 1) expect(sorted[i]! - sorted[i - 1]!).toBeGreaterThan(12.4)
        expect(Math.min(...sorted, 20)).toBeGreaterThan(10)
        expect(Math.max(...sorted, 20)).toBeLessThan(612)
      }
    }
  })
})

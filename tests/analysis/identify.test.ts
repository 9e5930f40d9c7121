import { describe, expect, it } from 'vitest'
import { identify, identifyAlone } from '../../src/analysis/identify.ts'
import type { Instrument } from '../../src/config/types.ts'
import type { RawSpectrum, WrittenTime } from '../../src/readers/types.ts'

const raw = (sample: string | null, time: WrittenTime | null): RawSpectrum => ({
  index: 0,
  x: new Float64Array([400, 500]),
  y: new Float64Array([0.1, 0.2]),
  xUnit: 'nm',
  medium: null,
  yKind: 'absorbance',
  sample,
  title: null,
  time,
  pathMm: null,
  temperatureC: null,
  concentrationMolPerL: null,
  header: {},
  warnings: [],
})

const instrument = (sampleFrom: Instrument['sampleFrom'], samplePattern: string | null): Instrument => ({
  name: 'uv1',
  title: 'uv1',
  dropFolder: '/drop',
  files: '**/*',
  reading: {},
  sampleFrom,
  samplePattern,
  absorbanceLimit: 2,
  wavelength: { repeatabilityNm: 0.05, accuracyNm: 0.5, bandwidthNm: 1 },
  everyMs: null,
})

const facts = (path: string, timeZone = 'Europe/Dublin') => ({ path, mtimeMs: Date.UTC(2026, 5, 1, 12), timeZone })
const pattern = '^(?<sample>.+)_(?<time>[0-9]{8}T[0-9]{4})'

describe('whose spectrum it is and when it was measured', () => {
  it('comes from the file name where the instrument says so, in the room’s time zone with its summer time', () => {
    const summer = identify(raw(null, null), facts('day/AGE40-1_20260701T0930.csv'), instrument('filename', pattern))
    expect(summer).toMatchObject({ sample: 'AGE40-1', measuredAt: Date.UTC(2026, 6, 1, 8, 30), flags: [] })
    const winter = identify(raw(null, null), facts('AGE40-1_20260101T0930.csv'), instrument('filename', pattern))
    expect(winter.measuredAt).toBe(Date.UTC(2026, 0, 1, 9, 30))
  })

  it('comes from the folder or the header where the instrument says so', () => {
    const inFolder = identify(raw('other', null), facts('GOLD-1/scan7.csv'), instrument('folder', null))
    expect(inFolder.sample).toBe('GOLD-1')
    const time = { local: '2026-03-02T09:00:00', offset: '+01:00' }
    const inHeader = identify(raw('GOLD-2', time), facts('x.csv'), instrument('header', null))
    expect(inHeader).toMatchObject({ sample: 'GOLD-2', measuredAt: Date.UTC(2026, 2, 2, 8), flags: [] })
  })

  it('is unknown, and said to be, when the name does not fit the pattern', () => {
    const found = identify(raw(null, null), facts('nonsense.csv'), instrument('filename', pattern))
    expect(found.sample).toBeNull()
    expect(found.remarks.join()).toMatch(/does not fit the pattern/)
  })

  it('takes the date of the file where nothing else tells the time, and flags it', () => {
    const found = identifyAlone(raw(null, null), facts('GOLD-1.csv'))
    expect(found).toMatchObject({
      sample: 'GOLD-1',
      measuredAt: Date.UTC(2026, 5, 1, 12),
      flags: ['time-from-file-date'],
    })
  })

  it('takes the first of two equal local times in the night when clocks go back, and says so', () => {
    const found = identifyAlone(raw('S', { local: '2026-10-25T01:30:00', offset: null }), facts('s.csv'))
    expect(found.measuredAt).toBe(Date.UTC(2026, 9, 25, 0, 30))
    expect(found.remarks.join()).toMatch(/twice/)
  })

  it('does not take a month 13 for a time', () => {
    const found = identify(raw(null, null), facts('A_20261301T0930.csv'), instrument('filename', pattern))
    expect(found.flags).toEqual(['time-from-file-date'])
  })
})

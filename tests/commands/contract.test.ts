import { writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, it } from 'vitest'
import { spectrumText, testRoom } from '../daemon/house.ts'

/** Maxima of hexaaquachromium(III), 17400 and 24600 cm⁻¹, from memory; B = 728.6 by the closed form of d3 (Tanabe and Sugano). */
const AQUA = [
  [17400, 3300, 0.4],
  [24600, 3800, 0.47],
] as const

const fitted = async (args: readonly string[] = []) => {
  const room = testRoom()
  const file = join(room.folder, 'AQUA-1.csv')
  writeFileSync(file, spectrumText({ bands: AQUA }))
  const ended = await room.run(['fit', file, '--ion', 'Cr3+', '--json', ...args])
  expect(ended.stderr).toBe('')
  expect(ended.code).toBe(0)
  return JSON.parse(ended.stdout)
}

describe('`fit --json`', () => {
  it('has the names that others script against', async () => {
    const row = await fitted()
    for (const name of [
      'file',
      'index',
      'sample',
      'measured_at',
      'points',
      'window_cm1',
      'bands',
      'ligand_field',
      'fit',
      'flags',
    ])
      expect(row).toHaveProperty(name)
    expect(Object.keys(row.bands[0])).toEqual(
      expect.arrayContaining([
        ...['role', 'term', 'position_cm1', 'u_position_cm1', 'u_model_cm1', 'maximum_cm1', 'u_maximum_cm1'],
        ...['maximum_nm', 'width_cm1', 'u_width_cm1', 'height', 'u_height'],
      ]),
    )
    expect(Object.keys(row.ligand_field)).toEqual(
      expect.arrayContaining([
        ...[
          'ion',
          'd',
          'geometry',
          'spin',
          'bands_used',
          'delta_cm1',
          'u_delta_cm1',
          'b_cm1',
          'u_b_cm1',
          'c_cm1',
          'u_c_cm1',
        ],
        ...['beta', 'beta_free_ion_b_cm1', 'dq_over_b', 'correlation_delta_b'],
      ]),
    )
    expect(Object.keys(row.fit)).toEqual(
      expect.arrayContaining(['recipe', 'rms', 'noise', 'reduced_chi2', 'components', 'iterations', 'stopped']),
    )
  })

  it('finds Δ and B of hexaaquachromium(III) within their uncertainties', async () => {
    const { bands, ligand_field: field, sample } = await fitted()
    expect(sample).toBe('AQUA-1')
    expect(bands.map((band: { role: string }) => band.role)).toEqual(['nu1', 'nu2'])
    expect(field).toMatchObject({
      ion: 'Cr3+',
      d: 3,
      geometry: 'octahedral',
      spin: null,
      bands_used: ['nu1', 'nu2'],
      c_cm1: null,
      beta_free_ion_b_cm1: 918,
    })
    expect(Math.abs(field.delta_cm1 - 17400)).toBeLessThan(4 * field.u_delta_cm1)
    expect(Math.abs(field.b_cm1 - 728.6)).toBeLessThan(4 * field.u_b_cm1)
    expect(field.u_delta_cm1).toBeLessThan(10)
    expect(field.beta).toBeCloseTo(field.b_cm1 / 918, 3)
    expect(field.dq_over_b).toBeCloseTo(field.delta_cm1 / 10 / field.b_cm1, 3)
  })

  it('adds the wavelength repeatability of a named instrument, as an error common to all bands', async () => {
    const alone = await fitted()
    const room = testRoom()
    const file = join(room.folder, 'AQUA-1_20260302T0900.csv')
    writeFileSync(file, spectrumText({ bands: AQUA }))
    const named = JSON.parse((await room.run(['fit', file, '--ion', 'Cr3+', '--instrument', 'uv1', '--json'])).stdout)
    expect(named.sample).toBe('AQUA-1')
    expect(named.measured_at).toBe('2026-03-02T09:00:00Z')
    // 0.05 nm at 574.6 nm is 1.5 cm⁻¹
    const added = Math.sqrt(named.bands[0].u_position_cm1 ** 2 - alone.bands[0].u_position_cm1 ** 2)
    expect(added).toBeCloseTo(17400 ** 2 * 1e-7 * 0.05, 1)
  })

  it('leaves with 66 for no such file, 65 for one that cannot be read, 64 for a wrong call', async () => {
    const room = testRoom()
    writeFileSync(join(room.folder, 'good.csv'), spectrumText({ bands: AQUA }))
    writeFileSync(join(room.folder, 'bad.csv'), 'nothing of the kind\n')
    expect((await room.run(['fit', 'none.csv', '--ion', 'Cr3+'])).code).toBe(66)
    const mixed = await room.run(['fit', 'good.csv', 'bad.csv', '--ion', 'Cr3+', '--json'])
    expect(mixed.code).toBe(65)
    expect(mixed.stdout.trim().split('\n')).toHaveLength(1)
    expect(mixed.stderr).toMatch(/^bad\.csv(:\d+)*: .+; .+\n$/)
    for (const args of [
      ['fit', 'good.csv'],
      ['fit', 'good.csv', '--ion', 'Xx9+'],
      ['fit', 'good.csv', '--ion', 'Cr3+', '--bands', 'two'],
      ['fit', '--ion', 'Cr3+'],
    ])
      expect((await room.run(args)).code, args.join(' ')).toBe(64)
  })
})

describe('`history`', () => {
  it('shows the columns of the view, as JSON and as CSV', async () => {
    const room = testRoom()
    room.drop('AGE-1_20260302T0900.csv', spectrumText())
    room.drop('STRANGER_20260302T0900.csv', spectrumText({ seed: 2 }))
    expect((await room.run(['run', '--once'])).code).toBe(0)
    const row = JSON.parse((await room.run(['history', 'AGE-1', '--json'])).stdout)
    expect(row).toMatchObject({
      sample: 'AGE-1',
      study: 'aging',
      species: 'chloropentaammine',
      instrument: 'uv1',
      measured_at: '2026-03-02T09:00:00Z',
      excluded: false,
      flags: [],
    })
    expect(row.path).toBe(10)
    const stranger = JSON.parse((await room.run(['history', 'STRANGER', '--json'])).stdout)
    expect(stranger).toMatchObject({ study: null, species: null, delta_cm1: null, b_cm1: null })
    const [head, line] = (await room.run(['history', 'AGE-1', '--csv'])).stdout.split('\n')
    expect(head!.split(',')).toEqual(Object.keys(row))
    expect(line!.split(',').slice(0, 5)).toEqual(['1', 'AGE-1', 'aging', 'chloropentaammine', 'uv1'])
    expect((await room.run(['history', 'NOBODY'])).code).toBe(66)
  })
})

import type { AlarmRow, KeptRow } from './observe.ts'

const COLUMNS = ['sample', 'measured at (UTC)', 'ν1', 'ν2', 'Δo ± u', 'B ± u (cm⁻¹)', 'judgement'] as const
const WIDTHS = [9, 17, 6, 6, 13, 13, 0] as const

const row = (cells: readonly string[]): string =>
  cells
    .map((cell, i) => cell.padEnd(WIDTHS[i]!))
    .join('  ')
    .trimEnd()

export const HEADING = row(COLUMNS)

const rounded = (value: number | null, digits = 0): string => (value === null ? '–' : value.toFixed(digits))
const withU = (value: number | null, u: number | null, digits: number): string =>
  value === null ? '–' : `${rounded(value, digits)} ± ${rounded(u, digits)}`

/** One line for a spectrum that was kept. */
export const spectrumLine = (kept: KeptRow): string =>
  row([
    kept.sample,
    kept.measured_at.slice(0, 16).replace('T', ' '),
    rounded(kept.nu1_cm1),
    rounded(kept.nu2_cm1),
    withU(kept.delta_cm1, kept.u_delta_cm1, 1),
    withU(kept.b_cm1, kept.u_b_cm1, 1),
    kept.judgement ?? 'not judged',
  ])

export const alarmLine = ({ id, subject, priority, message }: AlarmRow): string =>
  `ALARM ${id}, ${priority} priority, ${subject}: ${message}`

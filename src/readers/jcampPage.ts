import { later, secondsPerUnit } from './elapsed.ts'
import type { PageValue } from './jcampNtuples.ts'
import type { RawSpectrum } from './types.ts'

/**
 * The spectrum of a page: a page variable that is a time counts from the block's time, one that is a temperature is the spectrum's; what
 * the page says stands in the header in any case.
 */
export const onPage = (spectrum: RawSpectrum, page: PageValue | null, file: string): RawSpectrum => {
  if (page === null) return spectrum
  const shown = { ...spectrum, header: { ...spectrum.header, page: page.text } }
  if (page.value === null) return shown
  const celsius = celsiusOf(page.value, page.units)
  if (celsius !== null) return { ...shown, temperatureC: celsius }
  const seconds = secondsPerUnit(`time (${page.units})`)
  if (seconds === null) return shown
  if (spectrum.time !== null) return { ...shown, time: later(spectrum.time, page.value * seconds) }
  const warning = {
    code: 'time-unclear',
    place: { at: file, line: page.line },
    what: `"${page.text}" counts from a start that the file does not state`,
    remedy: 'state the start: `##LONGDATE= 2026/03/02 09:00:00 +0100`',
  }
  return { ...shown, warnings: [...spectrum.warnings, warning] }
}

const CELSIUS = ['C', '°C', 'CELSIUS', 'DEGREES CELSIUS', 'DEGREE CELSIUS', 'DEG C']

const celsiusOf = (value: number, units: string): number | null => {
  const unit = units.trim().toUpperCase()
  if (['K', 'KELVIN'].includes(unit)) return Math.round((value - 273.15) * 1000) / 1000
  return CELSIUS.includes(unit) ? value : null
}

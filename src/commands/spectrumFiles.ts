import { readFileSync } from 'node:fs'
import { EXIT, type Fault, sayFault } from '../fault.ts'
import { readSpectra } from '../readers/index.ts'
import type { RawSpectrum, ReadingHints } from '../readers/types.ts'

/** The spectra of a file named on the command line. Warnings go to stderr, faults are added to `faults`. */
export const spectraOf = (file: string, hints: ReadingHints, faults: Fault[]): readonly RawSpectrum[] => {
  const bytes = bytesOf(file, faults)
  if (bytes === null) return []
  const reading = readSpectra(bytes, file, hints)
  if (reading.kind === 'refused') faults.push(...reading.faults)
  const warnings = [
    ...(reading.kind === 'read' ? reading.warnings : []),
    ...reading.spectra.flatMap((raw) => raw.warnings),
  ]
  for (const warning of warnings) process.stderr.write(`${sayFault(warning)}\n`)
  return reading.spectra
}

export const exitOf = (faults: readonly Fault[]) =>
  faults.some(({ code }) => code === 'no-such-file') ? EXIT.noInput : EXIT.unreadable

/** ISO 8601 in UTC, without fractions of a second that nobody wrote. */
export const isoTime = (ms: number): string => new Date(ms).toISOString().replace('.000Z', 'Z')

const bytesOf = (file: string, faults: Fault[]): Uint8Array | null => {
  try {
    return readFileSync(file)
  } catch (error) {
    const missing = (error as { code?: string }).code === 'ENOENT'
    faults.push({
      code: missing ? 'no-such-file' : 'unreadable-file',
      place: { at: file },
      what: missing ? 'there is no such file' : (error as Error).message,
      remedy: missing ? 'see the name and the folder' : 'see that it is a file and may be read',
    })
    return null
  }
}

import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import type { Secret } from '../config/types.ts'
import { EXIT, FaultError } from '../fault.ts'

/**
 * The secret itself, from a systemd credential, an environment variable or a file; one line end at its end is dropped.
 * Throws a FaultError (exit 78) that says what to do; it never holds the secret.
 */
export const resolveSecret = (secret: Secret): string => {
  if ('env' in secret) {
    const value = process.env[secret.env]
    if (value === undefined || value === '')
      throw missing(`environment variable ${secret.env}`, 'is not set', 'set it where tendq is started')
    return value
  }
  if ('file' in secret)
    return readSecret(secret.file, 'make the file readable to the user that runs tendq, and to nobody else')
  const folder = process.env.CREDENTIALS_DIRECTORY
  if (folder === undefined)
    throw missing(
      `credential ${secret.credential}`,
      'CREDENTIALS_DIRECTORY is not set, so there are no credentials',
      `start tendq by systemd with LoadCredential=${secret.credential}:PATH, or use file: or env:`,
    )
  if (!/^[\w.-]+$/.test(secret.credential) || /^\.+$/.test(secret.credential))
    throw missing(
      `credential ${secret.credential}`,
      'is no name of a credential',
      'use letters, digits, dots and dashes',
    )
  return readSecret(join(folder, secret.credential), `add LoadCredential=${secret.credential}:PATH to the unit`)
}

const readSecret = (path: string, remedy: string): string => {
  let text: string
  try {
    text = readFileSync(path, 'utf8')
  } catch (error) {
    throw missing(path, `cannot be read (${(error as NodeJS.ErrnoException).code ?? 'unknown'})`, remedy)
  }
  const value = text.replace(/\r?\n$/, '')
  if (value === '') throw missing(path, 'is empty', 'write the secret into it')
  return value
}

const missing = (at: string, what: string, remedy: string): FaultError =>
  new FaultError([{ code: 'secret-missing', place: { at }, what, remedy }], EXIT.config)

import { createHash } from 'node:crypto'
import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { onTestFinished } from 'vitest'
import type { Arrival } from '../../src/intake/types.ts'
import { type Db, openStore, type Store, storeOn } from '../../src/store/index.ts'

/** A fresh data folder that is gone when the test has ended. */
export const freshFolder = (): string => {
  const folder = mkdtempSync(join(tmpdir(), 'tendq-store-'))
  onTestFinished(() => rmSync(folder, { recursive: true, force: true }))
  return folder
}

export const freshStore = (): { folder: string; db: Db; store: Store } => {
  const folder = freshFolder()
  const db = openStore(folder)
  onTestFinished(() => {
    db.close()
  })
  return { folder, db, store: storeOn(db) }
}

export const arrivalOf = (text: string, { file = 'a.csv', instrument = 'uv1', mtimeMs = 1 } = {}): Arrival => {
  const bytes = new TextEncoder().encode(text)
  return {
    instrument,
    file,
    bytes,
    sha256: createHash('sha256').update(bytes).digest('hex'),
    mark: { size: bytes.length, mtimeMs, ctimeMs: mtimeMs, inode: 7 },
    mtimeMs,
  }
}

import { printable } from './printable.ts'

/** One line on stderr that is written over, only where a person looks. */
export const progressLine = () => {
  const { stderr } = process
  let last = 0
  let shown = false
  return {
    show: (what: string): void => {
      const now = performance.now()
      if (!stderr.isTTY || now - last < 100) return
      last = now
      shown = true
      stderr.write(`\r\x1b[2K${printable(what)}`)
    },
    clear: (): void => {
      if (shown) stderr.write('\r\x1b[2K')
      shown = false
    },
  }
}

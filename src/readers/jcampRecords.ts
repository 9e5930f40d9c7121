/** The frame of a JCAMP-DX file: labelled records, and blocks from TITLE to END that may stand in one another (LINK). */
import type { Fault } from '../fault.ts'
import type { Line } from './text.ts'

export interface JcampRecord {
  /** Upper case, without blanks, `-`, `/`, `_`: labels are compared so. */
  readonly label: string
  /** As written. */
  readonly name: string
  readonly value: string
  readonly line: number
  /** Lines after the first, comments taken out: the body of a table. */
  readonly body: readonly Line[]
}

export interface Block {
  readonly line: number
  readonly records: readonly JcampRecord[]
  readonly inner: readonly Block[]
}

const LABEL = /^\s*##([^=]*)=(.*)$/

/** Labels compare in upper case without blanks, `-`, `/` and `_`. */
const normalLabel = (name: string): string => name.toUpperCase().replace(/[\s\-/_]/g, '')

/** The records of a file; `$$` starts a comment, `##=` is one. Text before the first label is disregarded if it is blank or comment. */
const recordsOf = (
  lines: readonly Line[],
  file: string,
): { readonly records: readonly JcampRecord[]; readonly fault: Fault | null } => {
  const records: (JcampRecord & { body: Line[] })[] = []
  for (const { number, text } of lines) {
    const comment = text.indexOf('$$')
    const bare = comment < 0 ? text : text.slice(0, comment)
    const m = LABEL.exec(bare)
    if (m) {
      records.push({ label: normalLabel(m[1]!), name: m[1]!.trim(), value: m[2]!.trim(), line: number, body: [] })
      continue
    }
    if (bare.trim() === '') continue
    const last = records.at(-1)
    if (bare.trimStart().startsWith('##') || !last) {
      const what = last ? `"${bare.trim().slice(0, 20)}" is a label without "="` : 'text stands before the first label'
      return {
        records,
        fault: { code: 'bad-label', place: { at: file, line: number }, what, remedy: 'export the file again' },
      }
    }
    last.body.push({ number, text: bare })
  }
  return { records: records.filter((record) => record.label !== ''), fault: null }
}

/** The blocks of a file. Every one that begins must end, or the file was cut short. */
export const blocksOf = (
  lines: readonly Line[],
  file: string,
): { readonly blocks: readonly Block[]; readonly faults: readonly Fault[] } => {
  const { records, fault } = recordsOf(lines, file)
  const blocks: Block[] = []
  const open: { line: number; records: JcampRecord[]; inner: Block[] }[] = []
  const faults: Fault[] = fault ? [fault] : []
  for (const record of records) {
    if (record.label === 'TITLE') {
      open.push({ line: record.line, records: [record], inner: [] })
      continue
    }
    const current = open.at(-1)
    if (!current) {
      faults.push({
        code: 'outside-block',
        place: { at: file, line: record.line },
        what: `##${record.name}= stands outside a block (before TITLE or after END)`,
        remedy: 'export the file again',
      })
      break
    }
    if (record.label !== 'END') current.records.push(record)
    else {
      open.pop()
      ;(open.at(-1)?.inner ?? blocks).push(current)
    }
  }
  if (open.length > 0) {
    const line = lines.findLast(({ text }) => text.trim() !== '')?.number ?? 1
    const what = `the block that begins on line ${open.at(-1)!.line} has no ##END=: the file was cut short`
    faults.push({
      code: 'cut-short',
      place: { at: file, line },
      what,
      remedy: 'copy the file again when it is complete',
    })
    // blocks that did end inside the open ones are whole
    for (const unfinished of open) blocks.push(...unfinished.inner)
  }
  return { blocks, faults }
}

/** The value of a label with what follows it on further lines, or null. */
export const textOf = (block: Block, label: string): string | null => {
  const record = block.records.find((r) => r.label === label)
  return record ? [record.value, ...record.body.map(({ text }) => text.trim())].join(' ').trim() : null
}

import type { FigureRow } from './figures.ts'
import { escapeHtml, oneLine } from './plain.ts'

/** A letter is written once, as blocks, and printed twice, so that text and HTML say the same. */
export type Block =
  | { readonly kind: 'heading'; readonly text: string }
  | { readonly kind: 'paragraph'; readonly text: string }
  | { readonly kind: 'list'; readonly items: readonly string[] }
  | { readonly kind: 'figures'; readonly rows: readonly FigureRow[] }
  | { readonly kind: 'command'; readonly text: string }
  | { readonly kind: 'picture'; readonly cid: string; readonly alt: string; readonly widthPx: number }

export const paragraph = (text: string): Block => ({ kind: 'paragraph', text })
export const command = (text: string): Block => ({ kind: 'command', text })

/** A heading with what stands below it; nothing where there is nothing to stand there. */
export const section = (title: string, blocks: readonly Block[]): readonly Block[] =>
  blocks.length === 0 ? [] : [{ kind: 'heading', text: title }, ...blocks]

export const listOf = (items: readonly string[]): readonly Block[] =>
  items.length === 0 ? [] : [{ kind: 'list', items: items.map((item) => oneLine(item, 1000)) }]

const COLUMNS = 76
const HEADER: FigureRow = { quantity: 'quantity', before: 'reference', now: 'now', change: 'change' }

const wrap = (text: string, indent = ''): string => {
  const lines: string[] = []
  let line = ''
  for (const word of text.split(' ')) {
    if (line !== '' && line.length + 1 + word.length > COLUMNS - indent.length) {
      lines.push(line)
      line = word
    } else line = line === '' ? word : `${line} ${word}`
  }
  return [...lines, line].join(`\n${indent}`)
}

const textTable = (rows: readonly FigureRow[]): string => {
  const all = [HEADER, ...rows]
  const width = (column: keyof FigureRow) => Math.max(...all.map((row) => row[column].length))
  const widths = { quantity: width('quantity'), before: width('before'), now: width('now') }
  return all
    .map(
      ({ quantity, before, now, change }) =>
        `  ${quantity.padEnd(widths.quantity)}   ${before.padEnd(widths.before)}   ${now.padEnd(widths.now)}   ${change}`,
    )
    .join('\n')
}

const textOf = (block: Block): string => {
  switch (block.kind) {
    case 'heading':
      return block.text.toUpperCase()
    case 'paragraph':
      return wrap(block.text)
    case 'list':
      return block.items.map((item) => `- ${wrap(item, '  ')}`).join('\n')
    case 'figures':
      return textTable(block.rows)
    case 'command':
      return `  ${block.text}`
    case 'picture':
      return wrap(`Picture: ${block.alt}.`)
  }
}

/** Plain text, lines of at most 76 columns save for figures and commands. */
export const printText = (blocks: readonly Block[]): string =>
  `${blocks.map((block, i) => `${block.kind === 'heading' && i > 0 ? '\n' : ''}${textOf(block)}`).join('\n')}\n`

const CELL = 'padding:3px 16px 3px 0;text-align:left;vertical-align:top;border-bottom:1px solid #bbb'

const htmlTable = (rows: readonly FigureRow[]): string => {
  const cells = (row: FigureRow, tag: 'th' | 'td') =>
    `<tr>${[row.quantity, row.before, row.now, row.change]
      .map((cell) => `<${tag} style="${CELL}">${escapeHtml(cell)}</${tag}>`)
      .join('')}</tr>`
  return `<table style="border-collapse:collapse">${cells(HEADER, 'th')}${rows.map((row) => cells(row, 'td')).join('')}</table>`
}

const htmlOf = (block: Block): string => {
  switch (block.kind) {
    case 'heading':
      return `<h2 style="font-size:1em;margin:1.4em 0 .3em">${escapeHtml(block.text)}</h2>`
    case 'paragraph':
      return `<p style="margin:.3em 0">${escapeHtml(block.text)}</p>`
    case 'list':
      return `<ul style="margin:.3em 0">${block.items.map((item) => `<li>${escapeHtml(item)}</li>`).join('')}</ul>`
    case 'figures':
      return htmlTable(block.rows)
    case 'picture':
      return `<p style="margin:.6em 0"><img src="cid:${escapeHtml(block.cid)}" alt="${escapeHtml(block.alt)}" width="${block.widthPx}" style="max-width:100%;height:auto"></p>`
    case 'command':
      return `<pre style="margin:.3em 0;white-space:pre-wrap">${escapeHtml(block.text)}</pre>`
  }
}

/** HTML without style sheet, script or link; a picture only from within the letter: any mail program shows it. */
export const printHtml = (title: string, blocks: readonly Block[]): string =>
  `<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8"><title>${escapeHtml(title)}</title></head>\n` +
  `<body style="font-family:Georgia,serif;font-size:16px;line-height:1.4;max-width:44em">\n${blocks.map(htmlOf).join('\n')}\n</body></html>\n`

import { FONT, INK, PAPER, TEXT_PX } from './look.ts'

/** Text made safe for SVG, in content and in quoted attributes; control characters and what else XML 1.0 forbids become spaces. */
export const escapeXml = (text: string): string =>
  text
    .replace(/(?![\t\n\r])\p{Cc}|\p{Cs}|[\ufffe\uffff]/gu, ' ')
    .replaceAll('&', '&amp;')
    .replaceAll('<', '&lt;')
    .replaceAll('>', '&gt;')
    .replaceAll('"', '&quot;')
    .replaceAll("'", '&#39;')

type Attributes = Readonly<Record<string, string | number>>

/** A coordinate with two decimals: the same text on every machine. */
export const px = (value: number): string =>
  Object.is(Math.round(value * 100), -0) ? '0' : String(Math.round(value * 100) / 100)

const attributesOf = (attributes: Attributes): string =>
  Object.entries(attributes)
    .map(([name, value]) => ` ${name}="${typeof value === 'number' ? px(value) : escapeXml(value)}"`)
    .join('')

export const element = (name: string, attributes: Attributes, children = ''): string =>
  children === ''
    ? `<${name}${attributesOf(attributes)}/>`
    : `<${name}${attributesOf(attributes)}>${children}</${name}>`

export const text = (x: number, y: number, content: string, attributes: Attributes = {}): string =>
  element('text', { x, y, ...attributes }, escapeXml(content))

export const line = (x1: number, y1: number, x2: number, y2: number, attributes: Attributes): string =>
  element('line', { x1, y1, x2, y2, ...attributes })

/** An open line through points; where one is missing (NaN) the line breaks. */
export const path = (points: readonly (readonly [x: number, y: number])[], attributes: Attributes): string => {
  let pen = 'M'
  const steps: string[] = []
  for (const [x, y] of points) {
    if (!Number.isFinite(x) || !Number.isFinite(y)) {
      pen = 'M'
      continue
    }
    steps.push(`${pen}${px(x)} ${px(y)}`)
    pen = 'L'
  }
  return steps.length === 0 ? '' : element('path', { d: steps.join(''), fill: 'none', ...attributes })
}

/** The whole drawing, with a title and a description for those who cannot see it. */
export const drawing = (width: number, height: number, title: string, description: string, body: string): string =>
  `<svg xmlns="http://www.w3.org/2000/svg" width="${width}" height="${height}" viewBox="0 0 ${width} ${height}" role="img" font-family="${escapeXml(FONT)}" font-size="${TEXT_PX}" fill="${INK}">` +
  `<title>${escapeXml(title)}</title><desc>${escapeXml(description)}</desc>` +
  `${element('rect', { width, height, fill: PAPER })}${body}</svg>\n`

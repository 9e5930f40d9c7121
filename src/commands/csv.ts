/** One line of RFC 4180 text; null is an empty field. Text that a spreadsheet would run as a formula is kept as text. */
export const stringify = (fields: readonly (string | number | null)[]): string => fields.map(field).join(',')

const field = (value: string | number | null): string => {
  if (value === null) return ''
  if (typeof value === 'number') return String(value)
  const safe = /^[=+\-@\t\r]/.test(value) ? `'${value}` : value
  return /[",\r\n]/.test(safe) ? `"${safe.replaceAll('"', '""')}"` : safe
}

import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { difdupLines } from '../../src/demo/difdup.ts'

/** Reads `(X++(Y..Y))` in DIFDUP form as the standard says, checking what it says to check. */
const decode = (lines: readonly string[]): readonly number[] => {
  const values: number[] = []
  let difference: number | null = null
  for (const [row, line] of lines.entries()) {
    const tokens = line.replace(/^[0-9.]+/, '').match(/[@A-Ia-i%J-Rj-rS-Zs]\d*/g) ?? []
    for (const [i, token] of tokens.entries()) {
      const [lead, rest] = [token[0]!, token.slice(1)]
      const digit = (code: string) => code.indexOf(lead)
      const squeezed = digit('@ABCDEFGHI') >= 0 ? digit('@ABCDEFGHI') : digit('.abcdefghi')
      const stepped = digit('%JKLMNOPQR') >= 0 ? digit('%JKLMNOPQR') : digit('.jklmnopqr')
      const sign = /[a-ij-r]/.test(lead) ? -1 : 1
      if (squeezed >= 0) {
        const value = sign * Number(`${squeezed}${rest}`)
        if (i === 0 && row > 0 && difference !== null) expect(value).toBe(values.at(-1))
        else values.push(value)
        difference = null
      } else if (stepped >= 0) {
        difference = sign * Number(`${stepped}${rest}`)
        values.push(values.at(-1)! + difference)
      } else {
        const count = Number(`${digit('.STUVWXYZs')}${rest}`)
        for (let n = 1; n < count; n += 1) values.push(values.at(-1)! + (difference ?? 0))
      }
    }
  }
  return values
}

describe('ordinates in DIFDUP form', () => {
  // McDonald and Wilks, Applied Spectroscopy 42 (1988) 151, Table VIIb: 1JT%jX, its first ordinate here in SQZ form
  test('are those of the published example', () => {
    expect(difdupLines([1, 2, 3, 3, 2, 1, 0, -1, -2, -3], (i) => String(400 + i))).toEqual(['400AJT%jX', '409c'])
  })

  // Table VI of the same paper: 53 ordinates, 0 0 0 0 2 4 4 4 7 5 … 104 110 121 128. Proves the decoder of this test.
  test('of the published spectrum survive being read and written again', () => {
    const published = ['599.860@VKT%TLkj%J%KLJ%njKjL%kL%jJULJ%kLK1%lLMNPNPRLJ0QTOJ1P', '700.158A28']
    const ordinates = decode(published)
    expect(ordinates).toHaveLength(53)
    expect(ordinates.slice(0, 10)).toEqual([0, 0, 0, 0, 2, 4, 4, 4, 7, 5])
    expect(ordinates.slice(-4)).toEqual([104, 110, 121, 128])
    expect(decode(difdupLines(ordinates, () => '599.860'))).toEqual(ordinates)
  })

  test('survive being read again, on lines of at most 80 characters', () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: -32767, max: 32767 }), { minLength: 2, maxLength: 400 }), (ordinates) => {
        const lines = difdupLines(ordinates, (i) => String(400 + i))
        expect(Math.max(...lines.map((line) => line.length))).toBeLessThanOrEqual(80)
        expect(decode(lines)).toEqual(ordinates)
      }),
    )
  })
})

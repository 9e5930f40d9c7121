import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { composeLetter } from '../../src/mail/index.ts'
import type { LetterFacts } from '../../src/mail/types.ts'
import { ALARM } from './facts.ts'

describe('a letter about an alarm', () => {
  const { subject, text, html } = composeLetter(ALARM)

  test('has a subject that says which sample, what and how much', () => {
    // u of the change: sqrt(8.1² + 4.2²) = 9.1
    expect(subject).toBe('[North bench] AGE40-1: First band has moved, ν1 +101.8 ± 9.1 cm⁻¹')
  })

  test('says from what to what with uncertainties, since when, on how many occasions, the rule, the cause, what to check', () => {
    for (const said of [
      '19531.4 ± 4.2 cm⁻¹',
      '19633.2 ± 8.1 cm⁻¹',
      '+101.8 ± 9.1 cm⁻¹',
      'since 2026-03-04T03:00:00+00:00',
      'on 2 occasions in a row',
      'High priority',
      'substitution (no probability has been worked out for it)',
      'Measure the sample again.',
      'Your safety data sheet and local rules come first.',
      'tendq alarms acknowledge 7 --by WHO --note TEXT',
      'no certified safety system',
      'Local rules',
    ]) {
      expect(text.replace(/\s+/g, ' ')).toContain(said)
      expect(html).toContain(said)
    }
    expect(text).toContain(ALARM.ruleText)
    expect(html).toContain('abs(nu1 - reference(nu1)) &gt; max(')
  })

  test('calls an unknown reference not known, never zero', () => {
    expect(text).toMatch(/Racah B\s+not known\s+641\.2 ± 3\.3 cm⁻¹\s+not known/)
  })

  test('gives a probability only where one was worked out', () => {
    expect(composeLetter({ ...ALARM, confidence: 0.914 }).text).toContain('posterior probability 91 %')
  })

  test('says in its subject that an alarm is over, or still rings', () => {
    expect(composeLetter({ ...ALARM, event: 'returned' }).subject).toContain('back to normal')
    expect(composeLetter({ ...ALARM, event: 're-alarmed' }).subject).toContain('still in alarm')
  })

  test('rounds a figure to two digits of its uncertainty', () => {
    const evidence = [{ name: 'height1', unit: '1', value: 0.50123, u: 0.00061, reference: 0.5, uReference: null }]
    // GUM 7.2.6: at most two significant digits of the uncertainty, the value to match
    expect(composeLetter({ ...ALARM, evidence, parameters: [] }).text).toContain('0.50123 ± 0.00061')
    const wide = [{ name: 'nu1', unit: 'cm^-1', value: 19633.2, u: 123.4, reference: 19500, uReference: null }]
    expect(composeLetter({ ...ALARM, evidence: wide, parameters: [] }).text).toContain('19633 ± 123 cm⁻¹')
  })
})

describe('the picture in a letter', () => {
  const picture = {
    kind: 'drawn',
    cid: 'trend.7@tendq',
    png: new Uint8Array(),
    alt: 'ν1 "<b>": 3 occasions',
    widthPx: 620,
  } as const
  test('comes from within the letter, and is told in words in the text', () => {
    const { text, html } = composeLetter(ALARM, picture)
    expect(html).toContain('<img src="cid:trend.7@tendq" alt="ν1 &quot;&lt;b&gt;&quot;: 3 occasions" width="620"')
    expect(text).toContain('Picture: ν1 "<b>": 3 occasions.')
  })
  test('is missed aloud where it could not be drawn, and not where there is none to draw', () => {
    expect(composeLetter(ALARM, { kind: 'failed', why: 'x' }).text).toContain('could not be drawn')
    expect(composeLetter(ALARM).text).not.toContain('could not be drawn')
  })
})

describe('names from outside', () => {
  const hostile = fc.oneof(
    fc.string({ unit: 'binary', maxLength: 60 }),
    fc.constantFrom(
      'A\r\nBcc: other@lab.example',
      'A\nSubject: other',
      '<script>alert(1)</script>',
      '"><img src=x onerror=alert(1)>',
      "'; DROP TABLE alarm; --",
      'A\u2028B\u202Egnp.exe\u0000\u0007\u001b[31m',
    ),
  )

  test('cannot open a header or a tag in a daily letter, a digest, or a letter about a common change', () => {
    const lines = (name: string) => ({
      ...{ instruments: [name], troubles: [name], alarms: [name], stale: [name], chattering: [name], silent: [name] },
      ...{ setAside: [name], unknownSamples: [name], undecided: [name], gathering: [name], decisions: [name] },
    })
    const lettersOf = (name: string) =>
      [
        {
          ...{ kind: 'daily', room: name, day: name, since: name, until: name, spectra: 1, samples: 1, repeated: 0 },
          ...{ pending: 0, letters: { sent: 0, waiting: 0, failed: 0 }, ...lines(name) },
        },
        { kind: 'digest', room: name, priority: 'low', letters: [{ alarm: 1, subject: name }], cautions: [name] },
        {
          ...ALARM,
          subject: name,
          samples: [name],
          silenced: [name],
          also: [name],
          event: 'suppressed',
          explainedBy: name,
        },
      ] as const satisfies readonly LetterFacts[]
    const tags = (html: string) => html.match(/<[^>]*>/g)
    const plain = lettersOf('x').map((facts) => composeLetter(facts))
    fc.assert(
      fc.property(hostile, (name) => {
        lettersOf(name)
          .map((facts) => composeLetter(facts))
          .forEach((letter, i) => {
            expect(letter.subject).not.toMatch(/[\p{Cc}\p{Cf}\u2028\u2029]/u)
            expect(letter.text.replaceAll('\n', '')).not.toMatch(/[\p{Cc}\p{Cf}\u2028\u2029]/u)
            expect(tags(letter.html)).toEqual(tags(plain[i]!.html))
          })
      }),
      { numRuns: 60 },
    )
  })

  test('cannot open a header, a tag or an attribute', () => {
    fc.assert(
      fc.property(hostile, hostile, hostile, (subject, ruleTitle, file) => {
        const meaning = `${subject}${file}`
        const facts = {
          ...ALARM,
          subject,
          ruleTitle,
          file,
          meaning,
          room: file,
          rule: subject,
          check: [file],
          cautions: [subject],
        }
        const letter = composeLetter(facts)
        expect(letter.subject).not.toMatch(/[\p{Cc}\p{Cf}\u2028\u2029]/u)
        expect([...letter.subject].length).toBeLessThanOrEqual(180)
        expect(letter.text.replaceAll('\n', '')).not.toMatch(/[\p{Cc}\p{Cf}\u2028\u2029]/u)
        // the tags of a letter do not depend on what it tells
        const tags = (html: string) => html.match(/<[^>]*>/g)
        const plain = {
          ...facts,
          subject: 'x',
          ruleTitle: 'x',
          file: 'x',
          meaning: meaning === '' ? '' : 'x',
          room: 'x',
          rule: 'x',
          check: ['x'],
          cautions: ['x'],
        }
        expect(tags(letter.html)).toEqual(tags(composeLetter(plain).html))
      }),
    )
  })
})

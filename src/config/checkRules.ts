import type { Fault } from '../fault.ts'
import { suggestion } from '../rules/suggest.ts'
import { doubleNames, faultAt, namesOf } from './checks.ts'
import type { Parts } from './parse.ts'
import { fits } from './wildcard.ts'

/** Names, and that every pattern of studies finds one. What the expressions say is judged by the room of rules. */
export const checkRules = (parts: Parts): readonly Fault[] => {
  const studies = namesOf(parts.studies, 'study')
  const certain = !parts.clouded.has('studies')
  return [
    ...doubleNames(parts.rules, 'rule'),
    ...parts.rules.flatMap((part) =>
      part.value.studies.flatMap((pattern, i) => {
        // a room without studies yet may already have its rules
        if (!certain || pattern === '*' || studies.some((study) => fits(pattern, study))) return []
        const near = suggestion(pattern, studies)
        const what = `no study fits "${pattern}", so the rule would never be judged`
        const remedy = near === null ? `the studies are ${studies.join(', ') || 'none'}` : `did you mean ${near}?`
        return [faultAt(part, ['studies', i], 'rule-without-study', { what, remedy })]
      }),
    ),
  ]
}

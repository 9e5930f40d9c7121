import { z } from 'zod'
import { address, count, flag, name, oneOf, quantity, sampleName, text, time, word } from '../pieces.ts'

/** Quantities whose unit depends on which one it is: kept as text here, read in `acceptance.ts`. */
const pairOfQuantities = () => z.tuple([text(), text()])

const conditions = z.strictObject({
  temperature: quantity('temperature', 'any').optional().describe('At which the samples are kept'),
  'measured-at': quantity('temperature', 'any').optional().describe('At which they are measured'),
  path: quantity('length', 'positive').optional().describe('Path of the cell'),
  concentration: quantity('concentration', 'positive').optional(),
  solvent: text().optional(),
})

const schedule = z.union([
  z.strictObject({ every: quantity('duration', 'positive') }),
  z.array(quantity('duration', 'from-zero')).min(1),
])

const reference = oneOf({
  first: count(1000).optional().describe('The first occasions of each sample on each instrument'),
  sample: sampleName('exact').optional().describe('Another sample, such as a good batch'),
  values: z.record(z.string(), pairOfQuantities()).optional().describe('Value and standard uncertainty'),
})

/** `studies/*.yaml` */
export const studySchema = z.strictObject({
  study: name(),
  title: text().optional(),
  species: name().optional().describe('Left out only by a check study that measures a standard'),
  standard: name().optional().describe('Of a check study: the standard whose certified figures apply'),
  kind: word(['stability', 'repeat', 'check']),
  samples: z
    .array(
      z.strictObject({
        name: sampleName('wildcards').describe('Exact, or with * and ?'),
        control: flag().optional().describe('Measured with every run: what it does is the doing of the room'),
      }),
    )
    .min(1),
  conditions: conditions.prefault({}),
  began: time().optional().describe('Origin of age; without it, the first spectrum'),
  ends: time().optional().describe('Nothing is overdue after it'),
  schedule: schedule.optional().describe('An interval, or the ages at which spectra are due'),
  replicates: z.strictObject({ within: quantity('duration', 'positive') }).optional(),
  reference: reference.prefault({ first: '5' }),
  'approve-reference': flag()
    .optional()
    .describe('A person approves each reference before anything is compared with it'),
  acceptance: z
    .record(z.string(), z.strictObject({ pass: pairOfQuantities(), look: pairOfQuantities().optional() }))
    .prefault({})
    .describe('By quantity: inside pass is right; inside pass but outside look, have a look'),
  tell: z.array(address()).prefault([]),
  escalate: z
    .strictObject({ after: quantity('duration', 'positive'), to: z.array(address()).min(1) })
    .optional()
    .describe('Whom to tell when nobody acknowledges'),
})

export type StudyFile = z.output<typeof studySchema>

import type { Species } from '../config/types.ts'
import { type Handling, mayAdvise } from './cautions.ts'

interface Check {
  readonly text: string
  /** What it makes people do; left out where a caution stands against it. */
  readonly handling?: Handling
}

const AGAIN: Check = { text: 'Wipe the cell, look for bubbles, and measure the same sample again.' }
const CONTROL: Check = {
  text: 'Measure a control or a freshly made sample on the same instrument: if it moved too, look at the instrument.',
}
const TURBID: Check = {
  text: 'Look through the cell against the light. If it is turbid, measure again after filtering a portion.',
  handling: 'filtering',
}

const CHECKS: Readonly<Record<string, readonly Check[]>> = {
  substitution: [
    AGAIN,
    CONTROL,
    { text: 'Compare with what the study planned: temperature, light, solvent and pH the sample was kept at.' },
  ],
  wavelength: [
    { text: 'Run the wavelength check of the instrument (holmium or another certified standard).' },
    { text: 'See whether other samples measured on it since then moved by as many nm.' },
    { text: 'Ask whether lamp, slit, cell holder or settings were changed.' },
  ],
  concentration: [
    { text: 'See that the cell has the path it should have and was filled above the beam.' },
    { text: 'See whether the vessel was open: solvent may have evaporated.' },
    AGAIN,
  ],
  unclear: [AGAIN, CONTROL, TURBID],
}

/** What to check first, in order; nothing that a caution on this compound stands against. */
export const checksFor = (species: Species | null, diagnosis: string): readonly string[] =>
  (CHECKS[diagnosis] ?? CHECKS.substitution!)
    .filter(({ handling }) => handling === undefined || mayAdvise(species, handling))
    .map(({ text }) => text)

import { EXIT, FaultError } from '../fault.ts'
import type { Field } from './field.ts'
import type { Level } from './types.ts'

export const spinOrbitLevels = (_d: number, _field: Field): readonly Level[] => {
  throw new FaultError(
    [{ code: 'ligand-field', place: { at: 'zeta' }, what: 'not yet', remedy: 'leave it out' }],
    EXIT.usage,
  )
}

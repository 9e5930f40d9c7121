/**
 * Whether a rule's condition holds after one more judgement. `row` counts the occasions in a row, this one included, on
 * which the rule rang: `persist` of them make the condition true, one that clears makes it false. `holds` and undecided
 * leave it as it was. A spectrum that comes late may ring, but later ones decide whether all is well.
 */
export const conditionAfter = (
  was: boolean,
  outcome: 'rings' | 'clears' | 'holds' | 'undecided',
  { row, persist, isLate = false }: { readonly row: number; readonly persist: number; readonly isLate?: boolean },
): boolean => {
  if (outcome === 'rings') return was || row >= persist
  return outcome === 'clears' && !isLate ? false : was
}

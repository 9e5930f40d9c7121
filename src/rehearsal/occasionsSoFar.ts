import { occasionsOf, type SpectrumRow } from '../series/index.ts'
import type { Occasion } from '../series/types.ts'

/**
 * Occasions that grow with each spectrum, in the order of time: a replicate changes the newest one, any other begins one.
 * Keeps at least `lookBack` of them. `take` returns the same array each time, changed.
 */
export const occasionsSoFar = (replicatesWithinMs: number | null, lookBack: number) => {
  const occasions: Occasion[] = []
  let replicates: SpectrumRow[] = []
  return {
    take: (row: SpectrumRow): readonly Occasion[] => {
      const first = replicates[0]
      const isReplicate =
        first !== undefined && replicatesWithinMs !== null && row.measuredAt - first.measuredAt <= replicatesWithinMs
      replicates = isReplicate ? [...replicates, row] : [row]
      const [newest] = occasionsOf(replicates, replicatesWithinMs)
      if (isReplicate) occasions[occasions.length - 1] = newest!
      else occasions.push(newest!)
      if (occasions.length > 2 * lookBack + ROOM) occasions.splice(0, occasions.length - lookBack)
      return occasions
    },
  }
}

/** Dropping old ones a hundred at a time keeps the cost of it small. */
const ROOM = 100

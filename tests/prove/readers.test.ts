import { describe, it } from 'vitest'
import { readsBack, survivesMutation } from '../readers/properties.ts'

describe('20,000 files', () => {
  it('a spectrum written in any dialect reads back exactly', () => readsBack(20_000))
  it('a damaged file is refused, or no point lies more than a step from its place', () => survivesMutation(20_000))
})

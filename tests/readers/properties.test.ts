import { describe, it } from 'vitest'
import { readsBack, survivesMutation } from './properties.ts'

describe('any file', () => {
  it('a spectrum written in any dialect reads back exactly', () => readsBack(400))
  it('a damaged file is refused, or no point lies more than a step from its place', () => survivesMutation(400))
})

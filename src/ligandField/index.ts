export type { Field } from './field.ts'
export { levels } from './levels.ts'
export type * from './types.ts'

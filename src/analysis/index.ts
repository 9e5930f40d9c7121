export { type AnalysisOutcome, analyse, lockRecipe, unprepared } from './analyse.ts'
export { type FileFacts, type Identity, identify, identifyAlone } from './identify.ts'
export { analysisJson } from './json.ts'
export { type Measured, quantitiesOf } from './quantities.ts'

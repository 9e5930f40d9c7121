export { type ChartDesign, type ChartPoint, type ChartState, chartStep, learn, startChart } from './chart.ts'
export { occasionsOf, type SpectrumRow } from './occasions.ts'
export { type ReferenceOptions, referenceOf, typedReference } from './reference.ts'
export { type Acceptance, verdictOf } from './verdict.ts'

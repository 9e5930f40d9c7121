/** The room of the bands: from a spectrum to fitted components with uncertainties. */
export { chooseRecipe } from './chooseRecipe.ts'
export { crossingPlaces } from './crossings.ts'
export { type CurveParts, evaluateFit } from './evaluateFit.ts'
export { componentsOf, fitBands } from './fitBands.ts'
export { fitTogether } from './fitTogether.ts'

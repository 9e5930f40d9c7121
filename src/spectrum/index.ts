export { type Preparation, prepareSpectrum } from './prepare.ts'
export { airToVacuumNm, nmOfWavenumber, PER_CM_OF_EV, vacuumToAirNm, wavenumberOfNm } from './units.ts'

/** Templates of the squeezed bispectrum: declarations, predictions and the closed forms behind them. Pure. */
export type * from './types';
export { TemplateError } from './errors';
export type { TemplateErrorCode } from './errors';
export { gaussLegendre } from './gauss-legendre';
export { complexLogGamma } from './log-gamma';
export {
  squeezedCoefficient,
  squeezedLogModulus,
  writeMixtureCoefficient,
  writeSqueezedCoefficient,
} from './squeezed-coefficient';
export { oscillatingPart, smoothCoefficients, smoothPart, squeezedCorrection } from './exact-parts';
export {
  exactLightShape,
  exactLightShapeTotal,
  exactShape,
  exactShapeTotal,
  exactTriangleShape,
} from './exact-shape';
export { lightCoefficients } from './light-coefficients';
export { oscillationColumns, powerColumn, validateAxis } from './bin-averages';
export type { OscillationColumns } from './bin-averages';
export {
  anglesFromWeights,
  anglesJacobian,
  drawIsotropicAngles,
  isotropicMarginal,
  logIsotropicDensity,
  mixingWeights,
} from './mixing';
export { fieldCount } from './options';
export { isLightMass } from './parameters';
export type { OptionDeclaration } from './options';
export { withTheory } from './formula';
export type { TemplateFormula } from './formula';
export { columnNameFault, columnParameter, ofPart, partOfName } from './column-parameters';
export { predictColumns } from './declaration';
export type { TemplateDeclaration } from './declaration';
export { compileTemplate, findTemplate, parameterData, templateCatalogue } from './catalogue';
export type { CatalogueEntry, CatalogueParameter } from './catalogue';

/**
 * What a fit allows. `firstFormWindow({ scheme, fit, tied?, request })`: every answer at one temperature.
 * `windowMap({ scheme, fit, tied?, request }, progress?)`: temperature × time, probabilities, the largest rectangle, a set-point box.
 */
export * from './types';
export { firstFormWindow } from './first-form';
export { windowMap, MapCancelled, type MapInput, type MapProgress } from './map';
export { describeFigure, describeInterval, describeSpan, describeNeverShare } from './words';
export { roundTwoDigits } from './figures';

/**
 * What a fit allows: `firstFormWindow({ scheme, fit, tied?, request })` gives every answer of the window station's first form.
 */
export * from './types';
export { firstFormWindow } from './first-form';
export { describeFigure, describeInterval, describeSpan, describeNeverShare } from './words';
export { roundTwoDigits } from './figures';

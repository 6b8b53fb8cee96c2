/**
 * What a fit allows: `firstFormWindow({ scheme, fit, tied?, request })` gives every answer of the window station's first form.
 */
export * from './types';

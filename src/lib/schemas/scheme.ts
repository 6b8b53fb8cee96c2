import { z } from 'zod';
import { fittable, id, quantity } from './quantity';

export const SPECIES_ROLES = [
	'starting material',
	'intermediate',
	'product',
	'impurity',
	'reagent in excess'
] as const;

export const speciesSchema = z.strictObject({
	/** Short symbol used in formulas and steps, e.g. A. */
	id,
	/** What the lab calls it, e.g. HX-14. */
	name: z.string().trim().max(80).default(''),
	role: z.enum(SPECIES_ROLES).optional(),
	molarMassGPerMol: z.number().positive().max(1e6).optional(),
	/** Which colour, marker and dash the species has on every page (0 to 7); set once, kept for good. */
	series: z.int().min(0).max(63).optional()
});
export type SpeciesContent = z.infer<typeof speciesSchema>;

export const excessSchema = z.strictObject({ species: id, order: z.number().min(-3).max(3) });

export const rateLawSchema = z.strictObject({
	kRef: quantity,
	/** Arrhenius activation energy; leave out where constants are used at the reference temperature alone. */
	activationEnergy: fittable.optional(),
	form: z.enum(['arrhenius', 'eyring']).optional(),
	excess: z.array(excessSchema).max(8).optional()
});
export type RateLawContent = z.infer<typeof rateLawSchema>;

export const equilibriumSchema = z.strictObject({
	equilibriumConstant: quantity,
	enthalpy: fittable.optional()
});

export const stepSchema = z.strictObject({
	id,
	/** Empty while the step is being drawn. */
	reactant: z.union([id, z.literal('')]),
	products: z
		.array(z.strictObject({ species: id, coefficient: z.number().positive().max(100).default(1) }))
		.max(6),
	forward: rateLawSchema,
	reverse: z.union([rateLawSchema, equilibriumSchema]).nullable().default(null),
	/** True when "to nothing we assay" is meant, so that an unfinished step is not taken for a loss. */
	loss: z.boolean().optional(),
	/** Measured heat of the step as written, for cautions only. Never defaulted. */
	enthalpy: quantity.optional()
});
export type StepContent = z.infer<typeof stepSchema>;

export const schemeContent = z.strictObject({
	species: z.array(speciesSchema).max(64),
	steps: z.array(stepSchema).max(128),
	referenceTemperature: quantity
});
export type SchemeContent = z.infer<typeof schemeContent>;

export const isEquilibrium = (
	reverse: StepContent['reverse']
): reverse is z.infer<typeof equilibriumSchema> => reverse != null && 'equilibriumConstant' in reverse;

export const emptyScheme = (): SchemeContent => ({
	species: [],
	steps: [],
	referenceTemperature: { value: 25, unit: 'degC' }
});

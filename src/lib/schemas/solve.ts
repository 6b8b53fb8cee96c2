import { z } from 'zod';
import { id, quantity } from './quantity';
import { schemeContent } from './scheme';

/** One batch under constant conditions, for `POST /api/v1/kinetics/solve`. */
export const solveRequest = z.strictObject({
	species: schemeContent.shape.species.min(1, 'Give at least one species.'),
	steps: schemeContent.shape.steps,
	referenceTemperature: schemeContent.shape.referenceTemperature,
	/** Charge of each species; one left out is not charged. */
	initial: z.record(id, quantity),
	/** Species held constant in excess. */
	excess: z.record(id, quantity).default({}),
	/** Left out: the reference temperature. */
	temperature: quantity.optional(),
	times: z.array(z.number().nonnegative('A time cannot lie before the start.')).max(10_000),
	timeUnit: z.enum(['s', 'min', 'h', 'd'])
});
export type SolveRequest = z.infer<typeof solveRequest>;

export interface SolveIssue {
	level: 'stop' | 'caution' | 'note';
	code: string;
	message: string;
	speciesId?: string;
	stepId?: string;
}

/**
 * One mode of the closed form. `amplitudes` are in the answer's unit: a number multiplies e^(re·t); of a pair
 * [a, b] (im > 0) a multiplies e^(re·t)·cos(im·t) and b e^(re·t)·sin(im·t); of a repeated rate the m-th of the list
 * multiplies t^m·e^(re·t), t in s.
 */
export interface SolvedMode {
	rate: { re: number; im: number; unit: '1/s' };
	multiplicity: number;
	/** s; null for the final composition, which does not fade. */
	halfLife: number | null;
	halfLifeUnit: 's';
	amplitudes: Record<string, number | number[]>;
}

export interface SolveAnswer {
	times: number[];
	timeUnit: SolveRequest['timeUnit'];
	unit: string;
	concentrations: Record<string, number[]>;
	/** Composition that the batch tends to. */
	final: Record<string, number>;
	modes: SolvedMode[];
	/** The curve of each species as a formula in mol/L, t in the time unit asked for. */
	closedForm: Record<string, { text: string; latex: string; unit: 'mol/L'; note: string | null }>;
	method: string;
	/** Bound on the error of any value, as a fraction of the total charge. */
	errorEstimate: number;
	issues: SolveIssue[];
	engineVersion: string;
}

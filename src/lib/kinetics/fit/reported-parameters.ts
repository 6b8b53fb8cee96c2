/**
 * Parameters of a finished fit in the units that people chose: estimate, standard error, intervals and state.
 *
 *     ln scale: error of θ = θ · error of ln θ (first order);  t interval θ ± t(n − p) · error
 *
 * Source: Bates & Watts (1988) 2.3 and 6.1.
 */
import type { FitParameter } from '../../schemas/fit';
import { evaluateLinear, linearOf } from './affine';
import { studentQuantile } from './distributions';
import type { KineticProblem } from './problem';
import type { ProfileInterval } from './profile';
import { reportedFactor, toReported, type Slot } from './slots';
import type { Uncertainty } from './uncertainty';

/** What is reported of an optimum besides its uncertainty. */
export interface ReportedOptimum {
	x: ArrayLike<number>;
	activeBounds: ArrayLike<number>;
}

/** From the scale of estimation to the natural one, in the engine's unit. */
export const naturalOf = (slot: Slot, value: number): number =>
	slot.scale === 'ln' ? Math.exp(value) : value;

/** Every parameter that a report lists, fixed and tied ones included. */
export function reportedParameters(
	problem: KineticProblem,
	best: ReportedOptimum,
	u: Uncertainty,
	profiles: ProfileInterval[] | null
): FitParameter[] {
	const t =
		u.degreesOfFreedom > 0
			? studentQuantile(0.5 + problem.request.options.confidenceLevel / 2, u.degreesOfFreedom)
			: NaN;
	return [...problem.slots.values()]
		.filter((slot) => slot.reported)
		.map((slot) => {
			const linear = linearOf(problem.slots, problem.free, slot.id);
			const inner = evaluateLinear(linear, best.x);
			const natural = slot.state === 'fixed' ? slot.value : naturalOf(slot, inner);
			const estimate = toReported(slot, natural);
			const root = linear.terms[0];
			const free = root ? root.free : -1;
			const held = free >= 0 && best.activeBounds[free] !== 0;
			const innerError = free >= 0 && !held ? Math.abs(root.coefficient) * u.errors[free] : NaN;
			const scale = slot.scale === 'ln' ? estimate : reportedFactor(slot);
			const error = Number.isFinite(innerError) ? Math.abs(scale) * innerError : null;
			const profile = profiles && free >= 0 ? profiles[free] : null;
			return {
				id: slot.id,
				estimate,
				standardError: error,
				ci95: error === null || !Number.isFinite(t) ? null : [estimate - t * error, estimate + t * error],
				profileCi95: profile ? reportedProfile(slot, linear, profile) : null,
				unit: slot.unit,
				state: held && slot.state === 'fitted' ? 'at bound' : slot.state,
				...(slot.localOf && slot.run ? { local: { run: slot.run, of: slot.localOf } } : {}),
				...(slot.scale === 'ln' && free >= 0
					? { logStandardError: Number.isFinite(innerError) ? innerError : null }
					: {})
			} satisfies FitParameter;
		});
}

function reportedProfile(
	slot: Slot,
	linear: { constant: number; terms: { free: number; coefficient: number }[] },
	profile: ProfileInterval
): [number | null, number | null] {
	const end = (value: number | null) =>
		value === null
			? null
			: toReported(slot, naturalOf(slot, linear.constant + linear.terms[0].coefficient * value));
	return [end(profile.lower), end(profile.upper)];
}

/**
 * A fit turned into one with a constant of its own in each run: which constants, the request, and where the search begins.
 */
import type { FitRequest } from '../../schemas/fit';
import { evaluateLinear } from './affine';
import { energyOf } from './local-slots';
import { compileProblem, type KineticProblem } from './problem';
import type { RunModel } from './run-model';
import type { Slot } from './slots';
import { searchBox } from './starts';

/** Shared constants that an energy carries from run to run. */
export function withEnergies(problem: KineticProblem): string[] {
	const { slots } = problem;
	const follows = (slot: Slot): boolean => {
		if ((slot.kind !== 'rate' && slot.kind !== 'equilibrium') || slot.state === 'fixed') return false;
		if (slot.tie) return follows(slots.get(slot.tie.to)!);
		return energyOf(slot, slots) !== undefined;
	};
	return [...slots.values()].filter(follows).map((s) => s.id);
}

/** The same request with these constants local. @throws RangeError in words where it cannot be compiled */
export function localProblem(request: FitRequest, ids: string[]): KineticProblem {
	const { options } = request;
	const bounds = Object.fromEntries(Object.entries(options.bounds).filter(([id]) => !ids.includes(id)));
	const { problem, issues } = compileProblem({
		...request,
		options: { ...options, bounds, local: [...(options.local ?? []), ...ids] }
	});
	if (problem) return problem;
	throw new RangeError(issues.flatMap((i) => (i.level === 'stop' ? [i.message] : [])).join(' '));
}

/** ln of a constant in one run from the directions that carry it, species in excess included; NaN where the run has none. */
export function lnConstant(run: RunModel, shared: string, x: ArrayLike<number>): number {
	const [step, sense, name] = shared.split('.');
	const ln = (of: string) => {
		const d = run.names.findIndex((n) => n.step === step && n.sense === of);
		return d < 0 ? NaN : evaluateLinear(run.lnRates[d], x);
	};
	return name === 'equilibriumConstant' ? ln('forward') - ln('reverse') : ln(sense);
}

/** The shared constants at each run's temperature. */
export function startFrom(local: KineticProblem, shared: KineticProblem, x: Float64Array): Float64Array {
	const start = searchBox(local).guess.slice();
	local.free.forEach((slot, j) => {
		const same = shared.free.findIndex((s) => s.id === slot.id);
		if (same >= 0) start[j] = x[same];
	});
	local.free.forEach((slot, j) => {
		const index = local.runs.findIndex((r) => r.id === slot.run);
		if (!slot.localOf || index < 0) return;
		// Both carry the same species in excess, so that their difference is that of the constants alone.
		const gap =
			lnConstant(shared.runs[index], slot.localOf, x) - lnConstant(local.runs[index], slot.localOf, start);
		if (Number.isFinite(gap)) start[j] += gap;
	});
	return start;
}

/**
 * Whether the closed form may be used, and how far.
 *
 * A species' rounding error is at most ROUNDING of `form.size[s]`. When that is below 1e-13 of the total charge for every
 * species, and value and slope at t = 0 are those of the charge, the closed form stands on its own. Otherwise (stiff reversible components, rates that nearly agree, general
 * components, whose eigenvalues have no relative accuracy) it is compared with the non-negative evaluation at times spread
 * over every mode; it must agree to 1e-13 of the total charge, and to 5e-14 of each species' own terms.
 */
import { basis, basisSlope, termPeaks, type ClosedForm } from './closed-form';
import { ExtendedPropagator } from './extended';
import { finalComposition } from './final-composition';
import type { ModeGroup } from './mode-groups';
import type { ModeSpace } from './mode-space';
import type { Propagator } from './propagator';
import type { LinearSystem, SolveMethod } from './types';

export interface Judgement {
	method: SolveMethod;
	useClosedForm: boolean;
	/** As a fraction of the total charge. */
	errorEstimate: number;
	/** Smallest |c_s| at which the closed form has relative accuracy without a second look. */
	trusted: Float64Array;
	/** The same, relative to the terms at the time in question. */
	smallest: number;
	/** True when every amplitude has a small relative error (components of one species), so that decay does not hurt. */
	exactAmplitudes: boolean;
}

/** Rounding of a closed form as a fraction of the absolute values that it is made of. */
const ROUNDING = 1e-15;
/** The same at t = 0, with room for the sums that are compared. */
const START_ROUNDING = 1e-14;
/** Error that is let pass without comparison, and the agreement asked for in a comparison, of the total charge. */
const TOLERANCE = 1e-13;
/** Agreement asked for in a comparison, of the species' own terms. */
const OWN_TOLERANCE = 5e-14;
/** Error of the non-negative evaluation, of the total charge. */
const PROPAGATOR_ERROR = 3e-14;
/** A value this small beside its terms is evaluated by the non-negative way: it keeps 5e-10 of itself by the bound … */
const SMALLEST = 2e-6;
/** … and also where only the comparison vouches for it. */
const SMALLEST_COMPARED = 1e-4;

export function judge(
	system: LinearSystem,
	charge: Float64Array,
	space: ModeSpace,
	groups: ModeGroup[],
	form: ClosedForm,
	exact: () => Propagator
): Judgement {
	let total = 0;
	for (const value of charge) total += Math.abs(value);
	if (total === 0) total = 1;
	const structure = structuralMethod(space, groups);
	const exactAmplitudes = space.kinds.every((kind) => kind === 'single');
	let top = 0;
	for (const size of form.size) if (!(size <= top)) top = size;
	const bound = top * ROUNDING;
	// A rate above zero is the rounding of a slow one beside fast ones in a general component: it would grow without limit.
	const finite = space.usable && Number.isFinite(bound) && form.re.every((rate) => rate <= 0);
	const bounded = finite && bound <= TOLERANCE * total && !space.kinds.includes('general');
	if (bounded && startsRight(system, charge, form))
		return {
			method: structure,
			useClosedForm: true,
			errorEstimate: Math.max(bound / total, 1e-15),
			trusted: trustedSizes(form, exactAmplitudes),
			smallest: SMALLEST,
			exactAmplitudes
		};
	const sums = growth(system, charge, total);
	const rejected = {
		useClosedForm: false,
		trusted: new Float64Array(form.n),
		smallest: SMALLEST,
		exactAmplitudes
	};
	if (!finite) return { ...rejected, method: 'uniformisation', errorEstimate: PROPAGATOR_ERROR * sums };
	const late = space.kinds.includes('general') ? lateTimes(system) : [];
	const found = compare(form, charge, exact(), late);
	if (found.error <= TOLERANCE * total && found.own <= OWN_TOLERANCE)
		return {
			exactAmplitudes: false,
			smallest: SMALLEST_COMPARED,
			method: structure,
			useClosedForm: true,
			errorEstimate: Math.max((3 * found.error) / total, PROPAGATOR_ERROR * sums),
			trusted: ownSizes(form).map((size) => size * SMALLEST_COMPARED)
		};
	if (found.error > bound + PROPAGATOR_ERROR * sums * total && !space.kinds.includes('general'))
		return { ...rejected, ...decide(system, charge, found.worstTimeS, exact(), total) };
	return { ...rejected, method: 'uniformisation', errorEstimate: PROPAGATOR_ERROR * sums };
}

/** Value and slope at t = 0 against the charge and the flows from it: what a wrong closed form would hardly meet by chance. */
function startsRight(system: LinearSystem, charge: Float64Array, form: ClosedForm): boolean {
	const { n, width } = form;
	const phi = new Float64Array(width);
	const turn = new Float64Array(width);
	basis(form, 0, phi);
	basisSlope(form, phi, turn);
	const flow = new Float64Array(n);
	let fastest = 0;
	for (let s = 0; s < n; s++) {
		flow[s] = -system.outflow[s] * charge[s];
		fastest = Math.max(fastest, system.outflow[s]);
	}
	for (const { from, to, rate, coefficient } of system.transfers)
		flow[to] += rate * coefficient * charge[from];
	for (let s = 0, at = 0; s < n; s++) {
		let value = 0;
		let slope = 0;
		for (let l = 0; l < width; l++, at++) {
			value += form.amplitudes[at] * phi[l];
			slope += form.amplitudes[at] * turn[l];
		}
		const room = START_ROUNDING * form.size[s];
		if (!(Math.abs(value - charge[s]) <= room && Math.abs(slope - flow[s]) <= 2 * room * fastest))
			return false;
	}
	return true;
}

/** A species of a single exact term is right to rounding however small. */
function trustedSizes(form: ClosedForm, exactAmplitudes: boolean): Float64Array {
	const trusted = new Float64Array(form.n);
	for (let s = 0; s < form.n; s++) {
		let terms = 0;
		for (let l = 0; l < form.width; l++) if (form.sizes[s * form.width + l] !== 0) terms++;
		trusted[s] = exactAmplitudes && terms <= 1 ? 0 : form.size[s] * SMALLEST;
	}
	return trusted;
}

/** How much larger than the charge the amounts may become where steps split (A → 2 B). */
function growth(system: LinearSystem, charge: Float64Array, total: number): number {
	if (system.transfers.every((t) => t.coefficient === 1)) return 1;
	const end = finalComposition(system, charge).final.reduce((sum, value) => sum + Math.abs(value), 0);
	return Number.isFinite(end) ? Math.max(4, (4 * end) / total) : 4;
}

function structuralMethod(space: ModeSpace, groups: ModeGroup[]): SolveMethod {
	if (groups.some((group) => group.members.length > 1)) return 'confluent';
	if (space.kinds.includes('general')) return 'general';
	return space.kinds.includes('detailed balance') ? 'symmetrised' : 'triangular';
}

/** Sums of the amplitudes themselves; a comparison vouches for their accuracy. */
function ownSizes(form: ClosedForm): Float64Array {
	const own = new Float64Array(form.n);
	const peaks = termPeaks(form);
	for (let s = 0, at = 0; s < form.n; s++)
		for (let l = 0; l < form.width; l++, at++)
			if (form.amplitudes[at] !== 0) own[s] += Math.abs(form.amplitudes[at]) * peaks[l];
	return own;
}

interface Comparison {
	error: number;
	/** Largest error as a fraction of the species' own terms. */
	own: number;
	worstTimeS: number;
}

function compare(form: ClosedForm, charge: Float64Array, exact: Propagator, late: number[]): Comparison {
	const found: Comparison = { error: 0, own: 0, worstTimeS: 0 };
	const phi = new Float64Array(form.width);
	const truth = new Float64Array(form.n);
	const own = ownSizes(form);
	const times = [...checkTimes(form), ...late];
	for (const timeS of times) {
		basis(form, timeS, phi);
		exact.apply(timeS, charge, truth);
		for (let s = 0; s < form.n; s++) {
			let sum = 0;
			for (let l = 0; l < form.width; l++) sum += form.amplitudes[s * form.width + l] * phi[l];
			const error = Math.abs(sum - truth[s]);
			if (!(error <= found.error)) {
				found.error = error;
				found.worstTimeS = timeS;
			}
			if (error > 0 && !(error / own[s] <= found.own)) found.own = error / own[s];
		}
	}
	return found;
}

/**
 * Times by which the slowest step has run, and long after: a slow mode of a general component may have been lost in rounding,
 * and is then missing among the times of the modes themselves.
 */
function lateTimes({ transfers, flows }: LinearSystem): number[] {
	let slowest = Infinity;
	for (const { rate } of flows ?? transfers) if (rate > 0) slowest = Math.min(slowest, rate);
	return [1, 1e3, 1e6, 1e9].map((factor) => factor / slowest).filter(Number.isFinite);
}

/** A tenth of, and once, each mode's time constant, and long after the slowest. */
function checkTimes(form: ClosedForm): number[] {
	const times: number[] = [];
	let slowest = 0;
	for (const re of form.re) {
		if (re === 0) continue;
		times.push(-0.1 / re, -1 / re);
		slowest = Math.max(slowest, -1 / re);
	}
	times.push(5 * slowest, 300 * slowest);
	return times.filter((timeS) => timeS > 0 && Number.isFinite(timeS));
}

function decide(
	system: LinearSystem,
	charge: Float64Array,
	timeS: number,
	exact: Propagator,
	total: number
): { method: SolveMethod; errorEstimate: number } {
	const truth = new ExtendedPropagator(system).apply(timeS, charge);
	const got = exact.apply(timeS, charge);
	const error = truth.reduce((top, value, i) => Math.max(top, Math.abs(value - got[i])), 0) / total;
	return { method: 'extended', errorEstimate: Math.max(error, PROPAGATOR_ERROR) };
}

/**
 * Where a search begins and how far it may go.
 *
 * A set of times can show rates between about 1/(100 · last time) and 5/(first gap): slower than that nothing moves, faster
 * everything is over before the first sample. Starting points fill that span (on the logarithm) by a seeded low-discrepancy
 * sequence; the bounds lie decades outside it, so that a parameter found at one says "not determined", not "chosen by us".
 */
import type { KineticProblem } from './problem';
import type { RunModel } from './run-model';
import { evaluateLinear } from './affine';
import { haltonSequence } from './sequence';
import type { Slot } from './slots';

export interface SearchBox {
	/** The person's own guess, completed from the data, on the scale of estimation. */
	guess: Float64Array;
	/** Span of the starting points. */
	from: Float64Array;
	to: Float64Array;
	lower: Float64Array;
	upper: Float64Array;
}

const ENERGY = { guess: 80e3, from: 30e3, to: 140e3, lower: -100e3, upper: 500e3 };
const ENTHALPY = { guess: 0, from: -80e3, to: 80e3, lower: -500e3, upper: 500e3 };

interface Range {
	guess: number;
	from: number;
	to: number;
	lower: number;
	upper: number;
}

function timeSpan(run: RunModel): { first: number; last: number } {
	const times = Array.from(run.timesS).filter((t) => t > 0);
	if (times.length === 0) return { first: 1, last: 1 };
	return { first: times[0], last: times[times.length - 1] };
}

/** ln k range of one rate parameter, over the runs and directions in which it stands. */
function rateRange(problem: KineticProblem, j: number, values: Float64Array): Range {
	let from = Infinity;
	let to = -Infinity;
	let lower = Infinity;
	let upper = -Infinity;
	for (const run of problem.runs) {
		const { first, last } = timeSpan(run);
		for (const linear of run.lnRates) {
			const own = linear.terms.find((t) => t.free === j);
			if (!own) continue;
			const rest = evaluateLinear(linear, values) - own.coefficient * values[j];
			const at = (rate: number) => (Math.log(rate) - rest) / own.coefficient;
			from = Math.min(from, at(0.02 / last), at(3 / first));
			to = Math.max(to, at(0.02 / last), at(3 / first));
			lower = Math.min(lower, at(1e-6 / last), at(1e4 / first));
			upper = Math.max(upper, at(1e-6 / last), at(1e4 / first));
		}
	}
	if (from > to) return { guess: 0, from: -5, to: 5, lower: -50, upper: 50 };
	return { guess: 0.5 * (from + to), from, to, lower, upper };
}

/** First value seen of a species through a channel of its own, in mol/L; NaN where there is none. */
function firstSeen(problem: KineticProblem, run: RunModel, species: number): number {
	for (const point of [...run.points].sort((a, b) => a.time - b.time)) {
		const channel = run.channels[point.channel];
		if (point.kind !== 'value' || channel.areaPercent) continue;
		if (channel.scaleFitted || channel.species.length !== 1 || channel.species[0] !== species) continue;
		const value = point.observed / (channel.weights[0] * Math.exp(channel.lnResponse.constant));
		if (Number.isFinite(value)) return value;
	}
	return NaN;
}

/** Largest signal of a run in mol/L, taking unknown response factors as one. */
function largestSignal(run: RunModel): number {
	let largest = 0;
	for (const point of run.points) {
		const channel = run.channels[point.channel];
		const weight = Math.max(...channel.weights.map(Math.abs));
		const response = channel.scaleFitted ? 1 : Math.exp(channel.lnResponse.constant);
		largest = Math.max(largest, Math.abs(point.observed) / (weight * response));
	}
	return largest || 1;
}

function amountRange(problem: KineticProblem, slot: Slot): Range {
	const run = problem.runs.find((r) => r.id === slot.run)!;
	const species = problem.species.indexOf(slot.id.slice(slot.id.lastIndexOf('.') + 1));
	const seen = firstSeen(problem, run, species);
	const size = largestSignal(run);
	const guess = slot.guessed ? slot.value : Number.isFinite(seen) ? Math.max(seen, 0) : 2 * size;
	const trusted = slot.guessed || Number.isFinite(seen);
	const reach = Math.max(guess, 0.1 * size);
	return {
		guess,
		from: trusted ? Math.max(0, guess - 0.3 * reach) : 0.5 * size,
		to: trusted ? guess + 0.3 * reach : 8 * size,
		lower: 0,
		upper: 1e4 * Math.max(size, guess)
	};
}

function responseRange(problem: KineticProblem, slot: Slot): Range {
	let guess = slot.guessed ? Math.log(slot.value) : NaN;
	for (const run of problem.runs)
		run.channels.forEach((channel, c) => {
			if (Number.isFinite(guess) || (slot.localOf ?? slot.id) !== `${channel.id}.responseFactor`) return;
			if (slot.run !== null && slot.run !== run.id) return;
			const largest = Math.max(...run.points.filter((p) => p.channel === c).map((p) => Math.abs(p.observed)));
			const charge = run.charge.reduce((a, l) => a + Math.max(0, l.constant), 0) || 1;
			guess = Math.log(largest / (0.6 * charge * Math.max(...channel.weights)));
		});
	if (!Number.isFinite(guess)) guess = 0;
	return { guess, from: guess - 0.7, to: guess + 2, lower: guess - 14, upper: guess + 14 };
}

function offsetRange(problem: KineticProblem, slot: Slot): Range {
	const run = problem.runs.find((r) => r.id === slot.run)!;
	const { first, last } = timeSpan(run);
	const guess = slot.guessed ? slot.value : 0;
	return { guess, from: guess - 0.3 * first, to: guess + 0.7 * first, lower: -last, upper: last };
}

function rangeOf(problem: KineticProblem, j: number, values: Float64Array): Range {
	const slot = problem.free[j];
	switch (slot.kind) {
		case 'rate': {
			const range = rateRange(problem, j, values);
			return slot.guessed ? { ...range, guess: Math.log(slot.value) } : range;
		}
		case 'equilibrium': {
			const guess = slot.guessed ? Math.log(slot.value) : 0;
			return { guess, from: -4, to: 4, lower: Math.min(-16, guess - 8), upper: Math.max(16, guess + 8) };
		}
		case 'energy':
			return { ...ENERGY, ...(slot.guessed ? { guess: slot.value } : {}) };
		case 'enthalpy':
			return { ...ENTHALPY, ...(slot.guessed ? { guess: slot.value } : {}) };
		case 'amount':
			return amountRange(problem, slot);
		case 'response':
			return responseRange(problem, slot);
		case 'offset':
			return offsetRange(problem, slot);
	}
}

/** Guess, span of starts and bounds for every estimated parameter. */
export function searchBox(problem: KineticProblem): SearchBox {
	const p = problem.free.length;
	const box: SearchBox = {
		guess: new Float64Array(p),
		from: new Float64Array(p),
		to: new Float64Array(p),
		lower: new Float64Array(p),
		upper: new Float64Array(p)
	};
	// Energies first: the span of a constant at the reference temperature depends on them.
	const order = problem.free.map((_, j) => j).sort((a, b) => rank(problem.free[a]) - rank(problem.free[b]));
	for (const j of order) {
		const range = rangeOf(problem, j, box.guess);
		const slot = problem.free[j];
		const asked = (v: number) => (slot.scale === 'ln' ? Math.log(Math.max(v, 0)) : v);
		const lower = asked(slot.lower);
		const upper = asked(slot.upper);
		box.lower[j] = Number.isFinite(lower) ? lower : Math.min(range.lower, range.guess - 1);
		box.upper[j] = Number.isFinite(upper) ? upper : Math.max(range.upper, range.guess + 1);
		if (slot.kind === 'amount' && !Number.isFinite(lower)) box.lower[j] = 0;
		const within = (v: number) => Math.min(Math.max(v, box.lower[j]), box.upper[j]);
		box.guess[j] = within(range.guess);
		box.from[j] = within(range.from);
		box.to[j] = within(range.to);
	}
	return box;
}

const rank = (slot: Slot): number =>
	slot.kind === 'energy' || slot.kind === 'enthalpy' ? 0 : slot.kind === 'equilibrium' ? 1 : 2;

/** The guess, then low-discrepancy points of the span. */
export function startingPoints(box: SearchBox, count: number, seed: number): Float64Array[] {
	const p = box.guess.length;
	const points = [box.guess.slice()];
	const sequence = haltonSequence(p, seed);
	for (let k = 1; k < count; k++) {
		const u = sequence(k);
		points.push(Float64Array.from(u, (v, j) => box.from[j] + v * (box.to[j] - box.from[j])));
	}
	return points;
}

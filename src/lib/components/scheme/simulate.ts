/** What the drawn scheme does under the chosen conditions; runs in the page at each move of a slider. */
import {
	checkNetwork,
	conservedTotals,
	linearSystem,
	rateConstants,
	solve,
	toNetwork,
	toSi,
	type Conditions,
	type ConservedTotal,
	type LinearSystem,
	type Network,
	type NetworkIssue,
	type RateConstants,
	type Solution
} from '$lib/kinetics';
import type { Quantity } from '$lib/schemas/quantity';
import type { SchemeContent } from '$lib/schemas/scheme';
import { roundUp } from '../charts/geometry';

export const SECONDS: Record<string, number> = { s: 1, min: 60, h: 3600, d: 86400 };

/** Conditions of the curves on the scheme page. They are this person's view and no part of the scheme. */
export interface ViewConditions {
	/** mol/L by species; a reagent in excess stays at its value. */
	charge: Record<string, number>;
	temperature: Quantity;
	/** In `timeUnit`; null: as long as it takes for things to settle. */
	span: number | null;
	/** Time in seconds that must be in sight when no span is set: the last sample of a run. */
	atLeastS?: number;
	timeUnit: string;
}

export interface Peak {
	species: string;
	timeS: number;
	molPerL: number;
}

export interface Simulation {
	network: Network;
	issues: NetworkIssue[];
	conditions: Conditions | null;
	charge: Float64Array;
	constants: RateConstants | null;
	system: LinearSystem | null;
	/** null while something stops the computation; `issues` says what. */
	solution: Solution | null;
	spanS: number;
	timesS: Float64Array;
	/** Values of each species at `timesS`, by symbol. */
	curves: Map<string, Float64Array>;
	peaks: Peak[];
	totals: ConservedTotal[];
}

const GRID = 240;
const EARLY = 60;

/** Even in time, and denser at the start on a logarithmic scale, so that fast modes are seen too. */
export function timeGrid(spanS: number, fastestS: number): Float64Array {
	const even = Array.from({ length: GRID + 1 }, (_, i) => (spanS * i) / GRID);
	const first = Math.max(spanS * 1e-9, Math.min(fastestS / 50, spanS / GRID));
	const ratio = Math.log(spanS / GRID / first);
	const early =
		ratio > 0 ? Array.from({ length: EARLY }, (_, i) => first * Math.exp((ratio * i) / EARLY)) : [];
	return Float64Array.from([...even, ...early].sort((a, b) => a - b));
}

/** Until the slowest mode that moves at least half a percent of the charge has run six half-lives. */
export function settlingTime(solution: Solution, timeUnitS: number): number {
	const total = solution.charge.reduce((sum, c) => sum + c, 0);
	let slowest = 0;
	for (const mode of solution.modes) {
		if (!Number.isFinite(mode.halfLifeS)) continue;
		const size = Math.max(0, ...mode.amplitudes.map((a) => Math.max(0, ...Array.from(a, Math.abs))));
		if (size >= 0.005 * total || mode.multiplicity > 1) slowest = Math.max(slowest, mode.halfLifeS);
	}
	if (slowest === 0) return timeUnitS;
	return roundUp((6 * slowest) / timeUnitS) * timeUnitS;
}

function fastestTime(solution: Solution): number {
	const times = solution.modes.map((m) => m.timeConstantS).filter((t) => Number.isFinite(t) && t > 0);
	return times.length ? Math.min(...times) : 1;
}

/** Where a slope that falls through zero between two times does so; Illinois variant of regula falsi (Dowell & Jarratt 1971). */
function slopeRoot(slope: (t: number) => number, low: number, high: number): number {
	let [a, b] = [low, high];
	let [fa, fb] = [slope(a), slope(b)];
	if (!(fa > 0) || !(fb < 0)) return fa > 0 ? b : a;
	for (let k = 0; k < 20; k++) {
		const t = b - (fb * (b - a)) / (fb - fa);
		const f = slope(t);
		if (f === 0 || Math.abs(t - b) < 1e-10 * high) return t;
		if (f * fb < 0) [a, fa] = [b, fb];
		else fa /= 2;
		[b, fb] = [t, f];
	}
	return b;
}

/** Interior maxima, refined on the slope of the closed form. */
function peaksOf(
	network: Network,
	solution: Solution,
	times: Float64Array,
	curves: Map<string, Float64Array>
) {
	const peaks: Peak[] = [];
	const n = times.length;
	network.species.forEach((species, s) => {
		const curve = curves.get(species.id)!;
		let top = 0;
		for (let i = 1; i < n; i++) if (curve[i] > curve[top]) top = i;
		if (top === 0 || top === n - 1) return;
		if (curve[top] < 1.02 * Math.max(curve[0], curve[n - 1])) return;
		const timeS = slopeRoot((t) => solution.slope(t)[s], times[top - 1], times[top + 1]);
		peaks.push({ species: species.id, timeS, molPerL: solution.at(timeS)[s] });
	});
	return peaks;
}

function conditionsOf(network: Network, view: ViewConditions): Conditions {
	const excessMolPerL: Record<string, number> = {};
	for (const step of network.steps)
		for (const law of [step.forward, step.reverse])
			if (law && law.form !== 'equilibrium')
				for (const { species } of law.excess) {
					const value = view.charge[species];
					if (value !== undefined) excessMolPerL[species] = value;
				}
	return { temperatureK: toSi(view.temperature, 'temperature'), excessMolPerL };
}

export function simulate(content: SchemeContent, view: ViewConditions): Simulation {
	const { network, issues } = toNetwork(content, { emptyProducts: 'unfinished' });
	const charge = Float64Array.from(network.species, (s) => view.charge[s.id] ?? 0);
	const nothing: Simulation = {
		network,
		issues,
		conditions: null,
		charge,
		constants: null,
		system: null,
		solution: null,
		spanS: SECONDS[view.timeUnit] ?? 3600,
		timesS: new Float64Array(),
		curves: new Map(),
		peaks: [],
		totals: []
	};
	const conditions = conditionsOf(network, view);
	const byId = Object.fromEntries(network.species.map((s, i) => [s.id, charge[i]]));
	const checked = checkNetwork(network, byId, conditions);
	const found = [...issues, ...checked];
	const stopped = checked.some((i) => i.level === 'stop');
	if (stopped || network.species.length === 0) return { ...nothing, issues: found, conditions };
	const constants = rateConstants(network, conditions);
	const system = linearSystem(network, constants);
	const solution = solve(system, charge);
	const unit = SECONDS[view.timeUnit] ?? 3600;
	const spanS =
		view.span && view.span > 0
			? view.span * unit
			: Math.max(settlingTime(solution, unit), view.atLeastS ?? 0);
	const timesS = timeGrid(spanS, fastestTime(solution));
	const all = solution.curves(timesS);
	const n = network.species.length;
	const curves = new Map(
		network.species.map((s, i) => [s.id, Float64Array.from(timesS, (_, k) => all[k * n + i])])
	);
	return {
		network,
		issues: found,
		conditions,
		charge,
		constants,
		system,
		solution,
		spanS,
		timesS,
		curves,
		peaks: peaksOf(network, solution, timesS, curves),
		totals: conservedTotals(network, charge)
	};
}

/** Charge for a scheme that nobody has given one: 0.5 mol/L of what it starts from. */
export function firstConditions(content: SchemeContent, timeUnit: string): ViewConditions {
	const made = new Set(content.steps.flatMap((s) => s.products.map((p) => p.species)));
	const start =
		content.species.find((s) => s.role === 'starting material') ??
		content.species.find((s) => content.steps.some((step) => step.reactant === s.id) && !made.has(s.id)) ??
		content.species.find((s) => s.role !== 'reagent in excess');
	const charge: Record<string, number> = start ? { [start.id]: 0.5 } : {};
	for (const s of content.species) if (s.role === 'reagent in excess') charge[s.id] = 5;
	return { charge, temperature: content.referenceTemperature, span: null, timeUnit };
}

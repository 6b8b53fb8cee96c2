/** Derivatives of a dosed batch against a complex step through an integration of their own (`test-complex.ts`). */
import { describe, expect, it } from 'vitest';
import { runDosing, type DosingPlan } from './dosing';
import { dosingSensitivities, type DosingParameter } from './dosing-sensitivity';
import { linearSystem } from './linear-system';
import { rateConstants } from './rate-laws';
import { Complex, complexScheme, derivative, integrateComplex, real, stepped } from './test-complex';
import { everyLaw } from './test-networks';

const excess = { X: 0.8, Y: 2.5 };
const temperatureK = 330;
const system = linearSystem(everyLaw, rateConstants(everyLaw, { temperatureK, excessMolPerL: excess }));
const plan: DosingPlan = {
	startMol: [1, 0.2, 0, 0],
	startLitres: 3,
	feeds: [
		{ startS: 300, endS: 1500, molPerS: [8e-4, 0, 1e-4, 0], litresPerS: 5e-4 },
		{ startS: 0, endS: 700, molPerS: [0, 3e-4, 0, 0], litresPerS: 2e-4 },
		{ startS: 1200, endS: 1800, molPerS: [0, 0, 0, 2e-4], litresPerS: 0 }
	],
	shots: [
		{ timeS: 900, mol: [0.3, 0.1, 0, 0], litres: 0.4 },
		{ timeS: 1500, mol: [0, 0, 0.2, 0.1], litres: 0.1 }
	]
};
const solution = runDosing(system, plan);

const parameters: DosingParameter[] = [
	{ kind: 'rate', step: 0, direction: 'forward' },
	{ kind: 'rate', step: 0, direction: 'reverse' },
	{ kind: 'rate', step: 1, direction: 'forward' },
	{ kind: 'rate', step: 3, direction: 'reverse' },
	{ kind: 'charge', species: 0 },
	{ kind: 'feed rate', feed: 0, species: 0 },
	{ kind: 'feed rate', feed: 2, species: 1 },
	{ kind: 'feed volume', feed: 0 },
	{ kind: 'feed start', feed: 0 },
	{ kind: 'feed start', feed: 1 },
	{ kind: 'feed end', feed: 0 },
	{ kind: 'feed end', feed: 1 },
	{ kind: 'feed end', feed: 2 },
	{ kind: 'shot amount', shot: 0, species: 0 },
	{ kind: 'shot amount', shot: 1, species: 1 },
	{ kind: 'shot volume', shot: 0 },
	{ kind: 'shot time', shot: 0 },
	{ kind: 'shot time', shot: 1 },
	{ kind: 'start volume' }
];

interface Plan {
	feeds: { startS: Complex; endS: Complex; mol: Complex[]; litres: Complex }[];
	shots: { timeS: Complex; mol: Complex[]; litres: Complex }[];
	start: Complex[];
	litres: Complex;
}

const zeros = () => Array.from({ length: 4 }, () => real(0));

/** Amounts and volume at a time, with the step in one parameter. */
function reference(parameter: DosingParameter, timeS: number): { amounts: Complex[]; litres: Complex } {
	const scheme = complexScheme(everyLaw, excess);
	const own: Plan = {
		feeds: plan.feeds.map((f) => ({
			startS: real(f.startS),
			endS: real(f.endS),
			mol: Array.from(f.molPerS, real),
			litres: real(f.litresPerS)
		})),
		shots: plan.shots.map((s) => ({
			timeS: real(s.timeS),
			mol: Array.from(s.mol, real),
			litres: real(s.litres)
		})),
		start: Array.from(plan.startMol, real),
		litres: real(plan.startLitres)
	};
	// A reverse constant that follows from K moves alone when ln K falls.
	if (parameter.kind === 'rate') {
		const { [parameter.direction]: law } = scheme.steps[parameter.step];
		if (law && 'lnEquilibrium' in law) law.lnEquilibrium = law.lnEquilibrium.minus(stepped(real(0)));
		else if (law) law.lnK = stepped(law.lnK);
		const { reverse } = scheme.steps[parameter.step];
		if (parameter.direction === 'forward' && reverse && 'lnEquilibrium' in reverse)
			reverse.lnEquilibrium = stepped(reverse.lnEquilibrium);
	}
	if (parameter.kind === 'charge') own.start[parameter.species] = stepped(own.start[parameter.species]);
	if (parameter.kind === 'start volume') own.litres = stepped(own.litres);
	const feed = 'feed' in parameter ? own.feeds[parameter.feed] : null;
	const shot = 'shot' in parameter ? own.shots[parameter.shot] : null;
	if (parameter.kind === 'feed rate') feed!.mol[parameter.species] = stepped(feed!.mol[parameter.species]);
	if (parameter.kind === 'feed volume') feed!.litres = stepped(feed!.litres);
	if (parameter.kind === 'feed start') feed!.startS = stepped(feed!.startS);
	if (parameter.kind === 'feed end') feed!.endS = stepped(feed!.endS);
	if (parameter.kind === 'shot amount') shot!.mol[parameter.species] = stepped(shot!.mol[parameter.species]);
	if (parameter.kind === 'shot volume') shot!.litres = stepped(shot!.litres);
	if (parameter.kind === 'shot time') shot!.timeS = stepped(shot!.timeS);
	return through(own, scheme, timeS);
}

/** Feeds are laid over each other: first order, so each feed and shot runs on its own from its own (complex) time. */
function through(own: Plan, scheme: ReturnType<typeof complexScheme>, timeS: number) {
	const at = real(temperatureK);
	const end = real(timeS);
	const piece = (durationS: Complex, feed?: Complex[]) => ({ durationS, fromK: at, toK: at, feed });
	let amounts = integrateComplex(scheme, [piece(end)], own.start).c;
	let { litres } = own;
	const add = (more: Complex[]) => (amounts = amounts.map((value, i) => value.plus(more[i])));
	for (const { startS, endS, mol, litres: rate } of own.feeds) {
		if (startS.re >= timeS) continue;
		const stop = endS.re < timeS ? endS : end;
		const pieces = [piece(stop.minus(startS), mol)];
		if (endS.re < timeS) pieces.push(piece(end.minus(endS)));
		add(integrateComplex(scheme, pieces, zeros()).c);
		litres = litres.plus(rate.times(stop.minus(startS)));
	}
	for (const shot of own.shots) {
		if (shot.timeS.re >= timeS) continue;
		add(integrateComplex(scheme, [piece(end.minus(shot.timeS))], shot.mol).c);
		litres = litres.plus(shot.litres);
	}
	return { amounts, litres };
}

/** Largest error beside the largest value. */
function relativeError(found: ArrayLike<number>, expected: number[]): number {
	const size = Math.max(...expected.map(Math.abs)) || 1;
	return Math.max(...expected.map((value, i) => Math.abs(value - found[i]))) / size;
}

describe('derivatives of a dosed batch, by complex steps', () => {
	it.each(parameters.map((parameter, p) => [JSON.stringify(parameter), p] as const))(
		'agree to 1e-12 by %s, before, between and after the events',
		(_, p) => {
			for (const timeS of [150, 800, 1250, 1700, 4000]) {
				const found = dosingSensitivities(solution, timeS, parameters);
				const { amounts, litres } = reference(parameters[p], timeS);
				const own = (values: Float64Array) => values.subarray(p * 4, p * 4 + 4);
				expect(relativeError(own(found.amounts), amounts.map(derivative)), `${timeS} s`).toBeLessThan(1e-12);
				expect(found.litres[p]).toBeCloseTo(derivative(litres), 12);
				const concentrations = amounts.map((n) => derivative(n.over(litres)));
				expect(relativeError(own(found.concentrations), concentrations)).toBeLessThan(1e-12);
			}
		}
	);

	it('name a feed, shot or species that is not there', () => {
		expect(() => dosingSensitivities(solution, 10, [{ kind: 'feed start', feed: 7 }])).toThrow(
			'Feed 8 is not in the plan, which has 3.'
		);
		expect(() => dosingSensitivities(solution, 10, [{ kind: 'shot time', shot: 2 }])).toThrow('Shot 3');
		expect(() => dosingSensitivities(solution, 10, [{ kind: 'charge', species: 4 }])).toThrow('Species 5');
	});
});

/** Derivatives along temperature programs against a complex step through an integration of their own (`test-complex.ts`). */
import { describe, expect, it } from 'vitest';
import { parameterSensitivities } from './parameter-sensitivity';
import { holdSegment, rampSegment, runProgram, type ProgramSegment } from './programs';
import { programSensitivities } from './program-sensitivity';
import type { FirstOrderParameter } from './rate-parameters';
import {
	complexScheme,
	derivative,
	integrateComplex,
	real,
	stepped,
	type ComplexLaw,
	type ComplexPiece,
	type ComplexScheme
} from './test-complex';
import { everyLaw } from './test-networks';

const charge = [1, 0.1, 0, 0];
const excess = { X: 0.8, Y: 2.5 };
const parameters: FirstOrderParameter[] = [
	...[0, 1, 2, 3].flatMap((step): FirstOrderParameter[] => [
		{ kind: 'ln rate', step, direction: 'forward' },
		{ kind: 'energy', step, direction: 'forward' }
	]),
	{ kind: 'ln rate', step: 3, direction: 'reverse' },
	{ kind: 'energy', step: 3, direction: 'reverse' },
	{ kind: 'ln equilibrium', step: 0 },
	{ kind: 'enthalpy', step: 0 },
	{ kind: 'ln excess', species: 'X' },
	{ kind: 'ln excess', species: 'Y' },
	{ kind: 'order', step: 0, direction: 'forward', species: 'X' },
	{ kind: 'order', step: 3, direction: 'reverse', species: 'Y' },
	{ kind: 'temperature' },
	{ kind: 'charge', species: 0 },
	{ kind: 'charge', species: 1 }
];

/** The scheme, charge and pieces with the step in one parameter. */
function steppedIn(parameter: FirstOrderParameter, pieces: ComplexPiece[]) {
	const scheme: ComplexScheme = complexScheme(everyLaw, excess);
	const start = charge.map(real);
	const law = () => {
		const { step, direction } = parameter as { step: number; direction: 'forward' | 'reverse' };
		return scheme.steps[step][direction] as ComplexLaw;
	};
	switch (parameter.kind) {
		case 'ln rate':
			law().lnK = stepped(law().lnK);
			break;
		case 'energy':
			law().energy = stepped(law().energy);
			break;
		case 'ln equilibrium': {
			const reverse = scheme.steps[parameter.step].reverse as { lnEquilibrium: ComplexLaw['lnK'] };
			reverse.lnEquilibrium = stepped(reverse.lnEquilibrium);
			break;
		}
		case 'enthalpy': {
			const reverse = scheme.steps[parameter.step].reverse as { enthalpy: ComplexLaw['lnK'] };
			reverse.enthalpy = stepped(reverse.enthalpy);
			break;
		}
		case 'ln excess': {
			const before = scheme.excess[parameter.species];
			scheme.excess[parameter.species] = before.times(stepped(real(0)).exp());
			break;
		}
		case 'order': {
			const own = law().orders.find((o) => o.species === parameter.species)!;
			own.order = stepped(own.order);
			break;
		}
		case 'temperature':
			return {
				scheme,
				start,
				pieces: pieces.map((p) => ({ ...p, fromK: stepped(p.fromK), toK: stepped(p.toK) }))
			};
		case 'charge':
			start[parameter.species] = stepped(start[parameter.species]);
	}
	return { scheme, start, pieces };
}

/** ∂c/∂θ at the end of the program, by species. */
function reference(program: ProgramSegment[], parameter: FirstOrderParameter): number[] {
	const pieces = program.map((s) => ({
		durationS: real(s.durationS),
		fromK: real(s.fromK),
		toK: real(s.toK)
	}));
	const { scheme, start, pieces: own } = steppedIn(parameter, pieces);
	return integrateComplex(scheme, own, start).c.map(derivative);
}

/** Largest error of the parameter's derivatives beside the largest of them. */
function relativeError(found: ArrayLike<number>, expected: number[]): number {
	const size = Math.max(...expected.map(Math.abs));
	return Math.max(...expected.map((value, i) => Math.abs(value - found[i]))) / size;
}

/** The part of a program up to a time. */
function cut(program: ProgramSegment[], timeS: number): ProgramSegment[] {
	const out: ProgramSegment[] = [];
	let left = timeS;
	for (const s of program) {
		if (left <= 0) break;
		const part = Math.min(1, left / s.durationS);
		out.push({ durationS: s.durationS * part, fromK: s.fromK, toK: s.fromK + (s.toK - s.fromK) * part });
		left -= s.durationS;
	}
	return out;
}

const label = (p: FirstOrderParameter) => JSON.stringify(p);

describe('derivatives along a program, by complex steps', () => {
	const program = [
		rampSegment(290, 325, 3600),
		holdSegment(325, 1800),
		rampSegment(340, 300, 2700),
		holdSegment(300, 900)
	];
	const times = [600, 3600, 4500, 6000, 9000];
	const solution = runProgram(everyLaw, program, charge, { excessMolPerL: excess });
	const found = programSensitivities(solution, times, parameters, excess);

	it.each(parameters.map((parameter, p) => [label(parameter), p] as const))(
		'agree to 1e-9 by %s, at the engine’s own tolerance',
		(_, p) => {
			times.forEach((timeS, k) => {
				const at = (p * times.length + k) * 4;
				const expected = reference(cut(program, timeS), parameters[p]);
				expect(relativeError(found.subarray(at, at + 4), expected), `${timeS} s`).toBeLessThan(1e-9);
			});
		}
	);
});

describe('derivatives of a batch at one temperature, by complex steps', () => {
	const times = [200, 1500, 9000];
	const conditions = { temperatureK: 318, excessMolPerL: excess };
	const found = parameterSensitivities(everyLaw, conditions, charge, times, parameters).derivatives;

	it.each(parameters.map((parameter, p) => [label(parameter), p] as const))(
		'agree to 1e-12 by %s',
		(_, p) => {
			times.forEach((timeS, k) => {
				const at = (p * times.length + k) * 4;
				const expected = reference([holdSegment(318, timeS)], parameters[p]);
				expect(relativeError(found.subarray(at, at + 4), expected), `${timeS} s`).toBeLessThan(1e-12);
			});
		}
	);
});

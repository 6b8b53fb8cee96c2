/**
 * A measured temperature program and a time offset together, held to an integration written out here: classical Runge–Kutta of
 * fourth order (Kutta 1901) on dc/dt at the temperature of the log, 4 000 steps a run, and least squares by Gauss–Newton steps with
 * derivatives from central differences.
 */
import { describe, expect, it } from 'vitest';
import { fitRequest } from '../../schemas/fit';
import { fit } from './fit';
import { normalNumbers, uniformNumbers } from './sequence';

const R = 8.314462618;
const T_REF = 318.15;
/** A ramp from 25 to 55 °C within two hours, then held; a reading every six minutes. */
const LOG = Array.from({ length: 61 }, (_, k) => ({ time: k / 10, celsius: Math.min(25 + 1.5 * k, 55) }));

/** Where the ramp ends, h. */
const BEND = 2;

/** K of the log at a time in h, straight between readings, the first and last one outside. */
function kelvin(time: number): number {
	const k = Math.min(Math.max(time * 10, 0), 60);
	const i = Math.min(Math.floor(k), 59);
	return 273.15 + LOG[i].celsius + (k - i) * (LOG[i + 1].celsius - LOG[i].celsius);
}

/** A and B of A → B → C at the clock times t + offset, from A = 1. θ = ln k1, E1, ln k2, offset (h). */
function curves([lnK1, e1, lnK2, offset]: number[], times: number[]): number[][] {
	const gap = (t: number) => (1 / kelvin(t) - 1 / T_REF) / R;
	const slope = (t: number, [a, b]: number[]) => {
		const flow = Math.exp(lnK1 - e1 * gap(t)) * a;
		return [-flow, flow - Math.exp(lnK2 - 60e3 * gap(t)) * b];
	};
	let state = [1, 0];
	let at = 0;
	const move = (by: number, d: number[]) => state.map((v, i) => v + by * d[i]);
	const to = (end: number) => {
		const steps = Math.ceil((end - at) / 0.0015);
		const h = (end - at) / steps;
		for (let k = 0; k < steps; k++) {
			const t = at + k * h;
			const k1 = slope(t, state);
			const k2 = slope(t + h / 2, move(h / 2, k1));
			const k3 = slope(t + h / 2, move(h / 2, k2));
			const k4 = slope(t + h, move(h, k3));
			state = state.map((v, i) => v + (h / 6) * (k1[i] + 2 * k2[i] + 2 * k3[i] + k4[i]));
		}
		at = end;
	};
	return times.map((time) => {
		const end = time + offset;
		// No step goes across the bend of the log.
		if (at < BEND && end > BEND) to(BEND);
		to(end);
		return state;
	});
}

const TIMES = Array.from({ length: 12 }, (_, k) => 0.45 * (k + 1));
const TRUTH = [Math.log(0.9), 75e3, Math.log(0.25), 0.12];

function measured(): number[][] {
	const normal = normalNumbers(uniformNumbers(12));
	return curves(TRUTH, TIMES).map((row) => row.map((v) => v + 0.003 * normal()));
}

/** Gauss–Newton on the integration above; returns estimates, errors and the sum of squares. */
function byHand(data: number[][]): { x: number[]; errors: number[]; ssr: number } {
	const unit = [1, 1e4, 1, 0.1];
	let x = TRUTH.slice();
	const residuals = (at: number[]) =>
		curves(at, TIMES).flatMap((row, i) => row.map((v, j) => v - data[i][j]));
	let inverse: number[][] = [];
	let r = residuals(x);
	for (let round = 0; round < 8; round++) {
		const columns = unit.map((u, j) => {
			const moved = (s: number) => residuals(x.map((v, k) => v + (k === j ? s * 1e-4 * u : 0)));
			const [up, down] = [moved(1), moved(-1)];
			return up.map((v, i) => (v - down[i]) / 2e-4);
		});
		const dot = (a: number[], b: number[]) => a.reduce((sum, v, i) => sum + v * b[i], 0);
		inverse = inverted(columns.map((a) => columns.map((b) => dot(a, b))));
		const gradient = columns.map((a) => dot(a, r));
		x = x.map((v, j) => v - unit[j] * dot(inverse[j], gradient));
		r = residuals(x);
	}
	const ssr = r.reduce((sum, v) => sum + v * v, 0);
	const s = Math.sqrt(ssr / (r.length - 4));
	return { x, errors: unit.map((u, j) => u * s * Math.sqrt(inverse[j][j])), ssr };
}

function inverted(matrix: number[][]): number[][] {
	const n = matrix.length;
	const a = matrix.map((row, i) => [...row, ...row.map((_, j) => (i === j ? 1 : 0))]);
	for (let k = 0; k < n; k++) {
		const pivot = a[k][k];
		a[k] = a[k].map((v) => v / pivot);
		for (let i = 0; i < n; i++) if (i !== k) a[i] = a[i].map((v, j) => v - a[i][k] * a[k][j]);
	}
	return a.map((row) => row.slice(n));
}

describe('a fit over a measured temperature program with a time offset', () => {
	const data = measured();
	const report = fit(
		fitRequest.parse({
			species: [...'ABC'].map((id) => ({ id })),
			steps: [
				{
					id: 's1',
					reactant: 'A',
					products: [{ species: 'B' }],
					forward: { kRef: { value: 0.5, unit: '1/h' }, activationEnergy: { fit: true } }
				},
				{
					id: 's2',
					reactant: 'B',
					products: [{ species: 'C' }],
					forward: { kRef: { value: 0.5, unit: '1/h' }, activationEnergy: { value: 60, unit: 'kJ/mol' } }
				}
			],
			referenceTemperature: { value: T_REF, unit: 'K' },
			runs: [
				{
					id: 'r1',
					temperature: { value: 45, unit: 'degC' },
					temperatureLog: LOG,
					initial: { A: { value: 1, unit: 'mol/L' } },
					timeUnit: 'h',
					timeOffset: { fit: true },
					channels: ['A', 'B'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
					timepoints: TIMES.map((time, i) => ({ time, values: { A: data[i][0], B: data[i][1] } }))
				}
			],
			options: { starts: 4, profiles: false }
		})
	);
	const hand = byHand(data);
	const of = (id: string) => report.parameters.find((p) => p.id === id)!;

	it('reaches the constants, energy, offset and errors of the independent integration', () => {
		expect(report.status).toBe('converged');
		expect(report.weightedSsr / hand.ssr).toBeCloseTo(1, 7);
		expect(of('s1.forward.kRef').estimate / Math.exp(hand.x[0])).toBeCloseTo(1, 6);
		expect(of('s1.forward.activationEnergy').estimate / (hand.x[1] / 1000)).toBeCloseTo(1, 6);
		expect(of('s2.forward.kRef').estimate / Math.exp(hand.x[2])).toBeCloseTo(1, 6);
		expect(of('r1.timeOffset').estimate / hand.x[3]).toBeCloseTo(1, 5);
		const errors = [
			of('s1.forward.kRef').logStandardError!,
			of('s1.forward.activationEnergy').standardError! * 1000,
			of('s2.forward.kRef').logStandardError!,
			of('r1.timeOffset').standardError!
		];
		errors.forEach((error, i) => expect(error / hand.errors[i]).toBeCloseTo(1, 4));
	});

	it('finds what the data were made with, within its errors', () => {
		[of('s1.forward.kRef').estimate, of('r1.timeOffset').estimate].forEach((value, i) => {
			const truth = i === 0 ? 0.9 : 0.12;
			const error = i === 0 ? of('s1.forward.kRef').standardError! : of('r1.timeOffset').standardError!;
			expect(Math.abs(value - truth)).toBeLessThan(3 * error);
		});
	});
});

import { describe, expect, it } from 'vitest';
import { fitRequest } from '../../schemas/fit';
import { programSensitivities } from '../program-sensitivity';
import { programFromLog, runProgram } from '../programs';
import { fit } from './fit';
import { KineticModel } from './model';
import { compileProblem } from './problem';
import { thin } from './temperature-chain';

const log = [
	[0, 15],
	[2, 40],
	[5, 40],
	[8, 60],
	[9, 25]
].map(([time, celsius]) => ({ time, celsius }));
const times = [0.5, 1, 2, 2.5, 4, 6, 7.5, 9, 10];
const request = (values: (k: number) => Record<string, number>, starts = 6) =>
	fitRequest.parse({
		species: [{ id: 'A' }, { id: 'B' }, { id: 'C' }],
		steps: [
			{
				id: 's1',
				reactant: 'A',
				products: [{ species: 'B' }],
				forward: {
					kRef: { value: 0.9, unit: '1/h' },
					activationEnergy: { fit: true, guess: { value: 72, unit: 'kJ/mol' } }
				},
				reverse: null
			},
			{
				id: 's2',
				reactant: 'B',
				products: [{ species: 'C' }],
				forward: { kRef: { value: 0.1, unit: '1/h' }, activationEnergy: { value: 98, unit: 'kJ/mol' } },
				reverse: { kRef: { value: 0.04, unit: '1/h' } }
			}
		],
		referenceTemperature: { value: 40, unit: 'degC' },
		runs: [
			{
				temperature: { value: 40, unit: 'degC' },
				temperatureLog: log,
				initial: { A: { fit: true, guess: { value: 1, unit: 'mol/L' } } },
				timeUnit: 'h',
				channels: ['A', 'B', 'C'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
				timepoints: times.map((time, k) => ({ time, values: values(k) }))
			}
		],
		options: { starts }
	});

describe('a run with a measured temperature log', () => {
	it('has the curves and derivatives of the engine’s error-controlled program', () => {
		const { problem } = compileProblem(request(() => ({ A: 0, B: 0, C: 0 })));
		const model = new KineticModel(problem!);
		const ids = problem!.free.map((s) => s.id);
		expect(ids).toEqual([
			's1.forward.kRef',
			's1.forward.activationEnergy',
			's2.forward.kRef',
			's2.reverse.kRef',
			'r1.initial.A'
		]);
		const x = Float64Array.from(problem!.free, (s) => (s.scale === 'ln' ? Math.log(s.value) : s.value));
		const out = new Float64Array(model.m);
		const jacobian = new Float64Array(model.m * model.p);
		expect(model.evaluatePredictions(x, out, jacobian)).toBe(true);
		const program = programFromLog(
			log.map((r) => r.time * 3600),
			log.map((r) => r.celsius + 273.15),
			10 * 3600
		);
		const solution = runProgram(problem!.network, program, [1, 0, 0], { tolerance: 1e-11 });
		const at = times.map((t) => t * 3600);
		const curves = solution.curves(at);
		const truth = programSensitivities(solution, at, [
			{ kind: 'ln rate', step: 0, direction: 'forward' },
			{ kind: 'energy', step: 0, direction: 'forward' },
			{ kind: 'ln rate', step: 1, direction: 'forward' },
			{ kind: 'ln rate', step: 1, direction: 'reverse' },
			{ kind: 'charge', species: 0 }
		]);
		problem!.points.forEach((point, i) => {
			expect(out[i]).toBeCloseTo(curves[point.time * 3 + point.channel], 7);
			for (let j = 0; j < 5; j++) {
				const expected = truth[(j * times.length + point.time) * 3 + point.channel];
				const scale = j === 1 ? 1e5 : 1;
				expect(jacobian[j * model.m + i] * scale).toBeCloseTo(expected * scale, 6);
			}
		});
	});

	it('gives back constants and energy from curves made by the engine, from one run', () => {
		const made = request(() => ({ A: 0, B: 0, C: 0 }));
		const { problem } = compileProblem(made);
		const at = times.map((t) => t * 3600);
		const program = programFromLog(
			log.map((r) => r.time * 3600),
			log.map((r) => r.celsius + 273.15),
			10 * 3600
		);
		const curves = runProgram(problem!.network, program, [1, 0, 0]).curves(at);
		const report = fit(request((k) => ({ A: curves[3 * k], B: curves[3 * k + 1], C: curves[3 * k + 2] })));
		const found = (id: string) => report.parameters.find((p) => p.id === id)!.estimate;
		expect(found('s1.forward.kRef')).toBeCloseTo(0.9, 5);
		expect(found('s1.forward.activationEnergy')).toBeCloseTo(72, 3);
		expect(found('s2.forward.kRef')).toBeCloseTo(0.1, 5);
		expect(found('r1.initial.A')).toBeCloseTo(1, 6);
		expect(report.studied.temperatureC).toEqual([15, 60].map((t) => expect.closeTo(t, 9) as number));
	});

	it('thins a dense log without leaving it by more than the tolerance', () => {
		const t = Float64Array.from({ length: 2000 }, (_, i) => i);
		const y = t.map((v) => 300 + 20 * Math.sin(v / 300));
		const { times: kept, temperatures } = thin(t, y, 0.05);
		expect(kept.length).toBeLessThan(120);
		let at = 0;
		for (let i = 0; i < 2000; i++) {
			while (kept[at + 1] < i) at++;
			const part = (i - kept[at]) / (kept[at + 1] - kept[at]);
			const line = temperatures[at] + part * (temperatures[at + 1] - temperatures[at]);
			expect(Math.abs(line - y[i])).toBeLessThanOrEqual(0.05 + 1e-9);
		}
	});
});

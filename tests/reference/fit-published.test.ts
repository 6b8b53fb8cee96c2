/** Published data sets through the whole fit: estimates, sums of squares and standard errors. */
import { describe, expect, it } from 'vitest';
import { fit } from '../../src/lib/kinetics/fit/fit';
import { fitRequest, type FitReport, type FitRequest } from '../../src/lib/schemas/fit';
import pinene from './c01_alpha_pinene_189C.json';

type Json = Record<string, unknown>;
const request = (json: Json): FitRequest => fitRequest.parse(json);
const parameter = (report: FitReport, id: string) => report.parameters.find((p) => p.id === id)!;
const relative = (a: number, b: number) => Math.abs(a / b - 1);

const species = (...ids: string[]) => ids.map((id) => ({ id }));
const law = (value: number, unit: string) => ({ kRef: { value, unit } });
const step = (id: string, reactant: string, product: string | null, value: number, unit: string) => ({
	id,
	reactant,
	products: product ? [{ species: product, coefficient: 1 }] : [],
	forward: law(value, unit),
	reverse: null
});

describe('alpha-pinene at 189.5 °C (Fuguitt & Hawkins 1947; Box et al. 1973)', () => {
	const names = pinene.data.species.map((_, i) => 'ABCDE'[i]);
	const data = request({
		species: species(...names),
		steps: pinene.data.arrows.map(([from, to], i) =>
			step(
				`s${i + 1}`,
				names[pinene.data.species.indexOf(from)],
				names[pinene.data.species.indexOf(to)],
				1e-5,
				'1/min'
			)
		),
		referenceTemperature: { value: 189.5, unit: 'degC' },
		runs: [
			{
				id: 'r1',
				temperature: { value: 189.5, unit: 'degC' },
				initial: { A: { value: 100, unit: '%' } },
				timeUnit: 'min',
				channels: names.map((id) => ({ id, weights: { [id]: 1 }, unit: '%' })),
				timepoints: pinene.data.times.map((time, i) => ({
					time,
					values: Object.fromEntries(names.map((id, j) => [id, pinene.data.observations[i][j]]))
				}))
			}
		]
	});

	it('reaches the published constants, sum of squares and standard errors', () => {
		const report = fit(data);
		expect(report.status).toBe('converged');
		expect(relative(report.weightedSsr, pinene.expected.rss.value)).toBeLessThan(1e-10);
		expect(report.degreesOfFreedom).toBe(35);
		pinene.expected.k.value.forEach((k, i) => {
			const found = parameter(report, `s${i + 1}.forward.kRef`);
			expect(relative(found.estimate, k)).toBeLessThan(1e-6);
			expect(relative(found.standardError!, pinene.expected.se_k.value[i])).toBeLessThan(1e-5);
			expect(relative(found.logStandardError!, pinene.expected.se_ln_k.value[i])).toBeLessThan(1e-5);
		});
		pinene.expected.correlation_ln_k.value.forEach((row, i) =>
			row.forEach((rho, j) => expect(report.correlation[i][j]).toBeCloseTo(rho, 6))
		);
	});
});

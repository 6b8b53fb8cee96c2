/**
 * The engine against published and independently computed figures; each file of tests/reference names its source.
 */
import { describe, expect, it } from 'vitest';
import { expm } from '../../src/lib/kinetics/expm';
import { linearSystem, rateConstants, sensitivities, solve, toNetwork, type LinearSystem } from '../../src/lib/kinetics';
import pinene from './c01_alpha_pinene_189C.json';
import butene from './c02_wei_prater_butene.json';
import bateman from './c05b_bateman_pairs.json';
import series from './c05d_series_max.json';
import chain from './c06h_irreversible_chain.json';
import matrices from './c07a_matrix_exponential.json';
import frechet from './c07c_frechet.json';

/** A system in units of 1/s from arrows [from, to, k]. */
function systemOf(species: string[], arrows: [string, string, number][]): LinearSystem {
	const { network } = toNetwork({
		species: species.map((id, i) => ({ id: `S${i}`, name: id })),
		steps: arrows.map(([from, to, k], i) => ({
			id: `s${i}`,
			reactant: `S${species.indexOf(from)}`,
			products: [{ species: `S${species.indexOf(to)}`, coefficient: 1 }],
			forward: { kRef: { value: k, unit: '1/s' } },
			reverse: null
		})),
		referenceTemperature: { value: 25, unit: 'degC' }
	});
	return linearSystem(network, rateConstants(network, { temperatureK: 298.15, excessMolPerL: {} }));
}

/** Time at which species i is largest, between lower and upper, by bisection of its slope. */
function peakTime(system: LinearSystem, charge: number[], i: number, lower: number, upper: number): number {
	const solution = solve(system, charge);
	for (let k = 0; k < 200; k++) {
		const middle = (lower + upper) / 2;
		if (solution.slope(middle)[i] > 0) lower = middle;
		else upper = middle;
	}
	return (lower + upper) / 2;
}

/** The table rounds 28.79 y · 365.2422 d · 24 h to 252367.75 h; its results were worked out from the unrounded product. */
const halfLives = (pair: { half_lives: string[] }) =>
	pair.half_lives.map((half) => (half === '252367.75' ? 28.79 * 365.2422 * 24 : Number(half)));

const relative = (value: number, expected: number) => Math.abs(value / expected - 1);

describe(`${butene.title} (Wei and Prater 1962)`, () => {
	const system = systemOf(butene.data.species, butene.data.arrows as [string, string, number][]);

	it('has the published eigenvalues', () => {
		const modes = solve(system, [1, 0, 0]).modes;
		const found = modes.map((mode) => mode.re).sort((a, b) => b - a);
		const { value, published } = butene.expected.eigenvalues;
		expect(found[0]).toBe(0);
		[1, 2].forEach((j) => {
			expect(relative(found[j], value[j])).toBeLessThan(1e-12);
			expect(found[j]).toBeCloseTo(published[j], 4);
		});
		expect(modes.every((mode) => mode.im === 0)).toBe(true);
	});
	it('ends in the published equilibrium', () => {
		const { value } = butene.expected.equilibrium;
		const solution = solve(system, [0.2, 0.3, 0.5]);
		value.forEach((share, i) => {
			expect(relative(solution.final[i], share)).toBeLessThan(1e-12);
			expect(relative(solution.at(50)[i], share)).toBeLessThan(1e-12);
		});
	});
});

describe(`${bateman.title} (Bateman 1910)`, () => {
	const { Ba140_La140, Te132_I132, Sr90_Y90, Mo99_Tc99m } = bateman.expected;
	it.each([Ba140_La140, Te132_I132, Sr90_Y90, Mo99_Tc99m])('$half_lives', (pair) => {
		const [parent, daughter] = halfLives(pair).map((half) => Math.LN2 / half);
		const system = systemOf(['P', 'D', 'E'], [['P', 'D', parent], ['D', 'E', daughter]]);
		const expected = Number(pair.t_max_daughter);
		expect(relative(peakTime(system, [1, 0, 0], 1, expected / 10, expected * 10), expected)).toBeLessThan(1e-12);
		expect(relative(solve(system, [1, 0, 0]).at(expected)[1], Number(pair.N2_max_per_N1_0))).toBeLessThan(1e-12);
		const late = solve(system, [1, 0, 0]).at(expected * 40);
		const activities = (late[1] * daughter) / (late[0] * parent);
		if (late[0] > 1e-250) expect(relative(activities, Number(pair.activity_ratio_at_equilibrium))).toBeLessThan(1e-9);
	});
});

describe(`${series.title} (Levenspiel 1999)`, () => {
	it.each(series.expected.rows)('k1 = $k1, k2 = $k2', (row) => {
		const system = systemOf(['A', 'R', 'S'], [['A', 'R', Number(row.k1)], ['R', 'S', Number(row.k2)]]);
		const at = solve(system, [1, 0, 0]).at(Number(row.t_max));
		expect(relative(at[1], Number(row.cR_max_over_cA0))).toBeLessThan(1e-13);
		expect(relative(at[0], Number(row.cA_at_tmax))).toBeLessThan(1e-13);
		expect(relative(peakTime(system, [1, 0, 0], 1, 0.01, 20), Number(row.t_max))).toBeLessThan(1e-13);
	});
	it.each([1e-3, 1e-6, 1e-9, 1e-12])('constants that differ by %g still give R to 1e-13', (gap) => {
		const system = systemOf(['A', 'R', 'S'], [['A', 'R', 1], ['R', 'S', 1 + gap]]);
		// c_R = e^{−t} (1 − e^{−gap t}) / gap, by expm1.
		const actual = 1 + gap - 1;
		const expected = (Math.exp(-1.5) * -Math.expm1(-actual * 1.5)) / actual;
		expect(relative(solve(system, [1, 0, 0]).at(1.5)[1], expected)).toBeLessThan(1e-13);
	});
});

describe('alpha-pinene at 189.5 °C: the curves at the optimum (Fuguitt and Hawkins 1947; Box et al. 1973)', () => {
	const k = pinene.expected.k.value;
	const arrows = pinene.data.arrows.map(([from, to, name]) => [from, to, k[Number(name.slice(1)) - 1]]);
	const solution = solve(systemOf(pinene.data.species, arrows as [string, string, number][]), pinene.data.c0);

	it('leave the sum of squares 19.872 of the published optimum', () => {
		const curves = solution.curves(pinene.data.times);
		const ssr = pinene.data.observations.flat().reduce((sum, y, j) => sum + (y - curves[j]) ** 2, 0);
		expect(relative(ssr, pinene.expected.rss.value)).toBeLessThan(1e-8);
		expect(relative(ssr, pinene.expected.rss_published.value)).toBeLessThan(1e-5);
	});
	it('agree with the tabulated model values', () => {
		const { value } = pinene.expected.model_at_optimum;
		const curves = solution.curves(pinene.data.times);
		// Twelve digits are tabulated, of constants given to twelve.
		value.flat().forEach((row, j) => expect(Math.abs(curves[j] - row)).toBeLessThan(1e-8));
	});
});

describe(`${chain.title} (Tjoa and Biegler 1991)`, () => {
	it('leaves the published objective at the published optimum', () => {
		const [k1, k2] = chain.expected.k.value;
		const curves = solve(systemOf(['A', 'B', 'C'], [['A', 'B', k1], ['B', 'C', k2]]), [1, 0, 0]).curves(chain.data.times);
		const rss = chain.data.observations.reduce(
			(sum, [a, b], j) => sum + (a - curves[3 * j]) ** 2 + (b - curves[3 * j + 1]) ** 2,
			0
		);
		expect(relative(rss, chain.expected.rss.value)).toBeLessThan(1e-6);
	});
});

describe('matrix exponentials of the literature (Moler and Van Loan 2003; Ward 1977)', () => {
	it.each(matrices.expected.cases)('$id: $description', ({ A, expA, suggested_relative_norm_tolerance }) => {
		const found = expm(A.flat().map(Number), A.length);
		const exact = expA.flat().map(Number);
		const size = Math.max(...exact.map(Math.abs));
		const error = Math.max(...exact.map((value, j) => Math.abs(value - found[j]))) / size;
		expect(error).toBeLessThanOrEqual(suggested_relative_norm_tolerance);
	});
});

describe('derivative of the exponential (Van Loan 1978; Daleckii and Krein 1965)', () => {
	it('block matrix: the upper right block of exp([[A, E], [0, A]])', () => {
		const { A, E } = frechet.data;
		const block = [...A.map((row, i) => [...row, ...E[i]]), ...A.map((row) => [0, 0, ...row])];
		const found = expm(block.flat(), 4);
		const exact = frechet.expected.L_A_E.value.flat().map(Number);
		const size = Math.max(...exact.map(Math.abs));
		[2, 3, 6, 7].forEach((at, j) => expect(Math.abs(found[at] - exact[j]) / size).toBeLessThan(1e-12));
	});
	it.each(Object.entries(frechet.expected.kinetic_sensitivities.value))(
		'A ⇌ B → C: curves and ∂c/∂k at t = %s',
		(time, expected) => {
			const rates = [0.7, 0.3, 0.2];
			const system = systemOf(['A', 'B', 'C'], [['A', 'B', 0.7], ['B', 'A', 0.3], ['B', 'C', 0.2]]);
			const found = sensitivities(
				system,
				[1, 0, 0],
				[Number(time)],
				[0, 1, 2].map((step) => ({ kind: 'rate', step, direction: 'forward' }))
			);
			expected.c.forEach((c, i) => expect(Math.abs(found.curves[i] - Number(c))).toBeLessThan(1e-14));
			[expected.dc_dk1, expected.dc_dk2, expected.dc_dk3].forEach((column, p) => {
				const size = Math.max(...column.map((value) => Math.abs(Number(value))));
				column.forEach((value, i) =>
					expect(Math.abs(found.derivatives[3 * p + i] / rates[p] - Number(value)) / size).toBeLessThan(1e-12)
				);
			});
		}
	);
});

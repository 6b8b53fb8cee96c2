import { describe, expect, it } from 'vitest';
import type { CriterionContent } from '../schemas/criterion';
import { criterionText, toCriterion } from './criteria';
import { describeNever, holdIntervals, timeTo } from './criteria-hold';
import { rateConstants } from './rate-laws';
import { linearSystem } from './linear-system';
import { solve } from './solve';
import { chain, system } from './test-systems';
import type { LinearSystem, Network, Step } from './types';

const names = ['A', 'B', 'C', 'D', 'E', 'F'];

function networkOf(n: number, reversible: [string, string][] = []): Network {
	const law = { form: 'arrhenius' as const, kRefPerS: 1, energyJPerMol: 0, excess: [] };
	const steps: Step[] = reversible.map(([a, b], i) => ({
		id: `s${i + 1}`,
		reactant: a,
		products: [{ species: b, coefficient: 1 }],
		forward: law,
		reverse: law
	}));
	return {
		species: names.slice(0, n).map((id) => ({ id, name: id })),
		steps,
		referenceTemperatureK: 298.15
	};
}

function ask(
	linear: LinearSystem,
	charge: number[],
	contents: CriterionContent[],
	horizon = Infinity,
	network = networkOf(linear.n)
) {
	const criteria = contents.map((content) => toCriterion(content, { network, charge }));
	return { ...holdIntervals(solve(linear, charge), criteria, horizon), criteria };
}

const ofCharge = (species: string, relation: 'NMT' | 'NLT', limit: number): CriterionContent => ({
	species,
	relation,
	limit,
	unit: '% of charge'
});

const HOUR = 3600;
/** Invented case H5: A → B → C, k1 1.20 1/h (72 kJ/mol), k2 0.0080 1/h (98 kJ/mol) at 40 °C. */
function windowAt(celsius: number, factor1 = 1, factor2 = 1) {
	const law = (kRefPerS: number, energyJPerMol: number) => ({
		form: 'arrhenius' as const,
		kRefPerS,
		energyJPerMol,
		excess: []
	});
	const network: Network = {
		species: names.slice(0, 3).map((id) => ({ id, name: id })),
		steps: [
			{
				id: 's1',
				reactant: 'A',
				products: [{ species: 'B', coefficient: 1 }],
				forward: law((1.2 * factor1) / HOUR, 72e3),
				reverse: null
			},
			{
				id: 's2',
				reactant: 'B',
				products: [{ species: 'C', coefficient: 1 }],
				forward: law((0.008 * factor2) / HOUR, 98e3),
				reverse: null
			}
		],
		referenceTemperatureK: 313.15
	};
	const linear = linearSystem(
		network,
		rateConstants(network, { temperatureK: celsius + 273.15, excessMolPerL: {} })
	);
	return ask(linear, [1, 0, 0], [ofCharge('A', 'NMT', 1), ofCharge('C', 'NMT', 3)], Infinity, network);
}

describe('windows of time', () => {
	it('gives the spans of the invented case at 30, 40 and 45 °C', () => {
		for (const [celsius, from, to] of [
			[30, 9.55, 15.26],
			[40, 3.84, 4.64],
			[45, 2.48, 2.64]
		]) {
			const { spans } = windowAt(celsius);
			expect(spans.length).toBe(1);
			expect(spans[0].fromS / HOUR).toBeCloseTo(from, 2);
			expect(spans[0].toS / HOUR).toBeCloseTo(to, 2);
			expect(spans[0]).toMatchObject({ bindsFrom: 0, bindsTo: 1 });
		}
	});

	it('closes at 47.6 °C (2.00 h), and at 37.1 °C with k1 − 10 % and k2 + 25 %', () => {
		const closing = (factor1 = 1, factor2 = 1) => {
			let [open, closed] = [30, 50];
			while (closed - open > 1e-6) {
				const middle = (open + closed) / 2;
				if (windowAt(middle, factor1, factor2).spans.length > 0) open = middle;
				else closed = middle;
			}
			return open;
		};
		expect(closing()).toBeCloseTo(47.6, 1);
		expect(windowAt(closing()).spans[0].fromS / HOUR).toBeCloseTo(2.0, 2);
		expect(closing(0.9, 1.25)).toBeCloseTo(37.1, 1);
		expect(windowAt(50).spans).toEqual([]);
		const adverse = windowAt(40, 0.9, 1.25);
		expect(adverse.spans).toEqual([]);
		expect(adverse.perCriterion[0].spans[0][0] / HOUR).toBeCloseTo(4.26, 2);
		expect(adverse.perCriterion[1].spans[0][1] / HOUR).toBeCloseTo(3.96, 2);
	});

	it('finds every span of an oscillating loop', () => {
		const loop = system(3, [
			[0, 1, 1],
			[1, 2, 1],
			[2, 0, 1]
		]);
		// A − 1/3 = 2/3 e^{−1.5 t} cos(√¾ t): below 1/3 between odd and even zeros of the cosine.
		const { spans } = ask(
			loop,
			[1, 0, 0],
			[{ species: 'A', relation: 'NMT', limit: 1 / 3, unit: 'mol/L' }],
			14
		);
		const zero = (m: number) => ((m + 0.5) * Math.PI) / Math.sqrt(0.75);
		expect(spans.length).toBe(2);
		expect(spans[0].fromS).toBeCloseTo(zero(0), 10);
		expect(spans[0].toS).toBeCloseTo(zero(1), 8);
		expect(spans[1].fromS).toBeCloseTo(zero(2), 5);
		expect(spans[1].toS).toBeCloseTo(zero(3), 3);
	});

	it('finds two spans where an intermediate is within limits before and after its maximum', () => {
		const { spans } = ask(chain([1.2, 0.15]), [1, 0, 0], [ofCharge('B', 'NMT', 50)]);
		const b = (t: number) => (1.2 / 1.05) * (Math.exp(-0.15 * t) - Math.exp(-1.2 * t));
		expect(spans.length).toBe(2);
		expect(spans[0].fromS).toBe(0);
		expect(b(spans[0].toS)).toBeCloseTo(0.5, 13);
		expect(b(spans[1].fromS)).toBeCloseTo(0.5, 13);
		expect(spans[1].toS).toBe(Infinity);
		expect(spans[0].bindsTo).toBe(0);
	});

	it('separates crossings that lie close together at a maximum', () => {
		const top = 8 ** (-0.15 / 1.05);
		for (const gap of [1e-3, 1e-6, 1e-9, 1e-11]) {
			const found = ask(chain([1.2, 0.15]), [1, 0, 0], [ofCharge('B', 'NLT', 100 * top * (1 - gap))]);
			expect(found.spans.length).toBe(1);
			const width = found.spans[0].toS - found.spans[0].fromS;
			// B″/B at the maximum is −k1 k2, so the span is 2 √(2 gap / (k1 k2)) wide.
			expect(width / (2 * Math.sqrt((2 * gap) / 0.18))).toBeCloseTo(1, gap < 1e-10 ? 1 : 2);
		}
	});

	it('reports a limit that is just touched as an instant, and no span of the other side', () => {
		const top = 8 ** (-0.15 / 1.05);
		const reach = ask(chain([1.2, 0.15]), [1, 0, 0], [ofCharge('B', 'NLT', 100 * top)]);
		expect(reach.spans).toEqual([]);
		expect(reach.perCriterion[0].touchesS.length).toBe(1);
		expect(reach.perCriterion[0].firstS).toBeCloseTo(Math.log(8) / 1.05, 5);
		const stay = ask(chain([1.2, 0.15]), [1, 0, 0], [ofCharge('B', 'NMT', 100 * top)]);
		expect(stay.spans).toEqual([{ fromS: 0, toS: Infinity, bindsFrom: null, bindsTo: null }]);
	});

	it('says never, with the equilibrium, for a limit beyond it or exactly on it', () => {
		const linear = system(2, [
			[0, 1, 1],
			[1, 0, 3]
		]);
		const network = networkOf(2, [['A', 'B']]);
		for (const limit of [60, 25]) {
			const { perCriterion, criteria } = ask(
				linear,
				[0.5, 0],
				[ofCharge('B', 'NLT', limit)],
				Infinity,
				network
			);
			expect(perCriterion[0].firstS).toBeNull();
			expect(describeNever(criteria[0], perCriterion[0].never!)).toBe('equilibrium at 25.0 % of charge');
		}
		const met = ask(linear, [0.5, 0], [ofCharge('B', 'NLT', 24.9)], Infinity, network);
		expect(met.spans[0].fromS).toBeCloseTo(-Math.log(1 - 24.9 / 25) / 4, 12);
	});

	it('says where a limit that is never met comes closest', () => {
		const turn = ask(chain([1.2, 0.15]), [1, 0, 0], [ofCharge('B', 'NLT', 80)]);
		const never = turn.perCriterion[0].never!;
		expect(never).toMatchObject({ where: 'turn' });
		expect(never.value).toBeCloseTo(74.3, 1);
		const end = ask(chain([1.2, 0.15]), [1, 0, 0], [ofCharge('C', 'NLT', 101)]);
		expect(describeNever(end.criteria[0], end.perCriterion[0].never!)).toBe('it ends at 100 % of charge');
		const start = ask(chain([1.2, 0.15]), [1, 0, 0], [ofCharge('A', 'NLT', 101)]);
		expect(start.perCriterion[0].never).toMatchObject({ where: 'start', value: 100 });
		const early = ask(chain([1.2, 0.15]), [1, 0, 0], [ofCharge('A', 'NMT', 1)], 2);
		expect(early.perCriterion[0].never).toMatchObject({ where: 'horizon', timeS: 2 });
	});

	it('holds from the start and without end where a limit is never exceeded', () => {
		expect(ask(chain([1, 1]), [1, 0, 0], [ofCharge('B', 'NMT', 40)]).spans).toEqual([
			{ fromS: 0, toS: Infinity, bindsFrom: null, bindsTo: null }
		]);
		expect(ask(chain([0, 0]), [1, 0, 0], [ofCharge('A', 'NLT', 100)]).spans[0].toS).toBe(Infinity);
		expect(ask(chain([1, 0.1]), [1, 0, 0], [ofCharge('C', 'NMT', 0)]).spans).toEqual([]);
	});

	it('misses no crossing of random networks that a fine scan finds', () => {
		let state = 7;
		const random = () => (state = (state * 16807) % 2147483647) / 2147483647;
		for (let round = 0; round < 40; round++) {
			const n = 3 + Math.floor(3 * random());
			const flows: [number, number, number][] = [];
			for (let i = 1; i < n; i++) flows.push([Math.floor(random() * i), i, 10 ** (3 * random() - 1.5)]);
			for (let extra = 0; extra < n; extra++) {
				const a = Math.floor(random() * n);
				const b = Math.floor(random() * n);
				if (a !== b) flows.push([a, b, 10 ** (3 * random() - 1.5)]);
			}
			const linear = system(n, flows);
			const charge = Array.from({ length: n }, (_, i) => (i === 0 ? 1 : 0));
			const solution = solve(linear, charge);
			const limit = 0.02 + 0.5 * random();
			const species = Math.floor(random() * n);
			const { perCriterion } = ask(linear, charge, [
				{ species: names[species], relation: 'NMT', limit, unit: 'mol/L' }
			]);
			const edges = perCriterion[0].spans.flat().filter((t) => t > 0 && Number.isFinite(t));
			for (const t of edges) expect(solution.at(t)[species]).toBeCloseTo(limit, 12);
			let seen = 0;
			let above = charge[species] > limit;
			for (let k = 1; k <= 1500; k++) {
				const now = solution.at(1e-4 * 1.012 ** k)[species] > limit;
				if (now !== above) seen++;
				above = now;
			}
			expect(edges.length).toBeGreaterThanOrEqual(seen);
			expect((edges.length - seen) % 2).toBe(0);
		}
	});
});

describe('criteria of other kinds', () => {
	it('limits conversion, selectivity, yield and ratio', () => {
		const [k1, k2] = [1.2, 0.15];
		const linear = chain([k1, k2]);
		const solution = solve(linear, [2, 0, 0]);
		const network = networkOf(3);
		const first = (content: CriterionContent) =>
			timeTo(solution, toCriterion(content, { network, charge: [2, 0, 0] })).spans[0];
		expect(
			first({ species: 'A', quantity: 'conversion', relation: 'NLT', limit: 99, unit: '%' })[0]
		).toBeCloseTo(Math.log(100) / k1, 12);
		const [start, end] = first({
			species: 'B',
			quantity: 'selectivity',
			versus: 'A',
			relation: 'NLT',
			limit: 90,
			unit: '%'
		});
		expect(start).toBe(0);
		const c = solution.at(end);
		expect(c[1] / (2 - c[0])).toBeCloseTo(0.9, 12);
		const opening = first({
			species: 'B',
			quantity: 'solution yield',
			versus: 'A',
			relation: 'NLT',
			limit: 70,
			unit: '%'
		})[0];
		expect(solution.at(opening)[1] / 2).toBeCloseTo(0.7, 12);
		const ratio = first({
			species: 'B',
			quantity: 'ratio',
			versus: 'A',
			relation: 'NLT',
			limit: 20,
			unit: '1'
		})[0];
		expect(solution.at(ratio)[1] / solution.at(ratio)[0]).toBeCloseTo(20, 10);
	});

	it('reads area % with response factors, mol % and % w/w', () => {
		const network = networkOf(2);
		network.species[0].molarMassGPerMol = 100;
		network.species[1].molarMassGPerMol = 300;
		const solution = solve(chain([0.8]), [1, 0]);
		const at = (unit: 'area %' | 'mol %' | '% w/w') =>
			timeTo(
				solution,
				toCriterion(
					{ species: 'A', relation: 'NMT', limit: 20, unit },
					{ network, charge: [1, 0], responseFactors: { B: 1.6 } }
				)
			).spans[0][0];
		const share = (factor: number) => -Math.log(factor / (4 + factor)) / 0.8;
		expect(at('mol %')).toBeCloseTo(share(1), 12);
		expect(at('area %')).toBeCloseTo(share(1.6), 12);
		expect(at('% w/w')).toBeCloseTo(share(3), 12);
	});

	it('refuses what cannot be formed, in plain words', () => {
		const network = networkOf(2);
		expect(() => toCriterion(ofCharge('X', 'NMT', 1), { network, charge: [1, 0] })).toThrow(/does not have/);
		expect(() =>
			toCriterion({ species: 'A', relation: 'NMT', limit: 1, unit: '% w/w' }, { network, charge: [1, 0] })
		).toThrow(/molar mass/);
		expect(() =>
			toCriterion(
				{ species: 'B', quantity: 'conversion', relation: 'NLT', limit: 1, unit: '%' },
				{ network, charge: [1, 0] }
			)
		).toThrow(/not in the charge/);
	});

	it('writes criteria in words', () => {
		expect(criterionText(ofCharge('C', 'NMT', 3))).toBe('C NMT 3 % of charge');
		expect(
			criterionText({ species: 'A', quantity: 'conversion', relation: 'NLT', limit: 99, unit: '%' })
		).toBe('conversion of A NLT 99 %');
	});
});

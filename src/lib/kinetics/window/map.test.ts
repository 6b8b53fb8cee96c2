import { describe, expect, it } from 'vitest';
import type { SchemeContent } from '../../schemas/scheme';
import { windowMapRequest, type WindowMapRequestInput } from '../../schemas/window';
import { MapCancelled, windowMap, type MapInput } from './map';
import { largestRectangle } from './rectangle';

/** Invented case A → B → C of 40 °C: 1.20 1/h (72 kJ/mol) and 0.0080 1/h (98 kJ/mol). */
function input(more: Partial<WindowMapRequestInput> = {}, error = 0.01): MapInput {
	const scheme: SchemeContent = {
		species: ['A', 'B', 'C'].map((id) => ({ id, name: '' })),
		steps: (
			[
				['s1', 'A', 'B', 1.2, 72],
				['s2', 'B', 'C', 0.008, 98]
			] as const
		).map(([id, reactant, species, k, energy]) => ({
			id,
			reactant,
			products: [{ species, coefficient: 1 }],
			forward: { kRef: { value: k, unit: '1/h' }, activationEnergy: { value: energy, unit: 'kJ/mol' } },
			reverse: null
		})),
		referenceTemperature: { value: 40, unit: 'degC' }
	};
	return {
		scheme,
		fit: {
			parameters: [1.2, 0.008].map((estimate, i) => ({
				id: `s${i + 1}.forward.kRef`,
				estimate,
				standardError: estimate * error,
				ci95: null,
				profileCi95: null,
				unit: '1/h',
				state: 'fitted'
			})),
			fittedIds: ['s1.forward.kRef', 's2.forward.kRef'],
			covariance: [
				[error ** 2, 0],
				[0, error ** 2]
			],
			scales: ['ln', 'ln'],
			degreesOfFreedom: 20,
			studied: { temperatureC: [30, 50], chargeMolPerL: { A: [0.5, 0.5] }, lastTimeH: 16 }
		},
		request: windowMapRequest.parse({
			temperatures: { from: { value: 28, unit: 'degC' }, to: { value: 52, unit: 'degC' }, count: 13 },
			times: { from: { value: 1, unit: 'h' }, to: { value: 16, unit: 'h' }, count: 31 },
			charge: { A: { value: 0.5, unit: 'mol/L' } },
			criteria: [
				{ species: 'A', relation: 'NMT', limit: 1, unit: '% of charge' },
				{ species: 'C', relation: 'NMT', limit: 3, unit: '% of charge' }
			],
			draws: 200,
			...more
		})
	};
}

describe('the map of temperature and time', () => {
	const map = windowMap(input());
	const at = (celsius: number, hours: number) =>
		map.temperaturesC.findIndex((t) => Math.abs(t - celsius) < 1e-9) * map.times.length +
		map.times.findIndex((t) => Math.abs(t - hours) < 1e-9);

	it('agrees with the spans at 30 and 40 °C, and is closed at 50 °C', () => {
		for (const [celsius, hours, inside] of [
			[30, 9.5, false],
			[30, 10, true],
			[30, 15, true],
			[30, 15.5, false],
			[40, 3.5, false],
			[40, 4, true],
			[40, 4.5, true],
			[40, 5, false]
		] as const)
			expect(map.holds[at(celsius, hours)]).toBe(inside);
		expect(map.times.some((_, k) => map.holds[at(50, 1) + k])).toBe(false);
	});

	it('names the limit that binds on either side, and the margin', () => {
		expect(map.binds[at(40, 3.5)]).toBe(0);
		expect(map.binds[at(40, 5)]).toBe(1);
		expect(map.margin[at(40, 3.5)]).toBeCloseTo(1 - Math.exp(-4.2) / 0.01, 9);
		expect(map.outsideStudied.map((o, i) => (o ? map.temperaturesC[i] : 0)).filter(Boolean)).toEqual([
			28, 52
		]);
	});

	it('gives probabilities near one inside, near zero outside, and near a half at an edge', () => {
		expect(map.probability![at(30, 12)]).toBe(1);
		expect(map.probability![at(30, 8)]).toBe(0);
		const edge = windowMap(
			input({
				temperatures: { from: { value: 40, unit: 'degC' }, to: { value: 41, unit: 'degC' }, count: 2 },
				times: {
					from: { value: Math.log(100) / 1.2, unit: 'h' },
					to: { value: 4.2, unit: 'h' },
					count: 2
				},
				draws: 1000
			})
		);
		expect(edge.probability![0]).toBeCloseTo(0.5, 1);
	});

	it('finds a rectangle that holds at every point', () => {
		const { rectangle, temperaturesC, times, probability } = map;
		expect(rectangle).not.toBeNull();
		temperaturesC.forEach((t, i) =>
			times.forEach((h, k) => {
				const inside =
					t >= rectangle!.temperatureC[0] &&
					t <= rectangle!.temperatureC[1] &&
					h >= rectangle!.time[0] &&
					h <= rectangle!.time[1];
				if (inside) expect(probability![i * times.length + k]).toBeGreaterThanOrEqual(0.95);
			})
		);
	});

	it('refuses 40 ± 2 °C, 4.2 h ± 15 min as not robust, and finds a narrow box in the middle robust', () => {
		const box = (temperature: number, tolerance: number, hours: number, minutes: number) =>
			windowMap(
				input({
					setPoint: {
						temperature: { value: temperature, unit: 'degC' },
						temperatureTolerance: tolerance,
						time: { value: 60 * hours, unit: 'min' },
						timeTolerance: minutes
					}
				})
			).setPoint!;
		const refused = box(40, 2, 4.2, 15);
		expect(refused.robust).toBe(false);
		expect(refused.sentence).toMatch(/^Not robust: at 4?3?\d\d?\.\d °C/);
		expect(box(31, 0.5, 11.5, 30).robust).toBe(true);
	});

	it('tells its progress and can be cancelled', () => {
		const seen: number[] = [];
		windowMap(input(), (done) => {
			seen.push(done);
			return true;
		});
		expect(seen[0]).toBe(0);
		expect(seen[seen.length - 1]).toBe(1);
		expect(() => windowMap(input(), (done) => done < 0.4)).toThrow(MapCancelled);
	});
});

describe('the largest rectangle', () => {
	const brute = (good: number[], rows: number[], columns: number[]) => {
		let best = 0;
		for (let a = 0; a < rows.length; a++)
			for (let b = a + 1; b < rows.length; b++)
				for (let c = 0; c < columns.length; c++)
					for (let d = c + 1; d < columns.length; d++) {
						let all = true;
						for (let i = a; i <= b; i++)
							for (let k = c; k <= d; k++) all &&= good[i * columns.length + k] === 1;
						if (all) best = Math.max(best, (rows[b] - rows[a]) * (columns[d] - columns[c]));
					}
		return best / ((rows[rows.length - 1] - rows[0]) * (columns[columns.length - 1] - columns[0]));
	};

	it('agrees with trying every rectangle on random grids', () => {
		let state = 3;
		const random = () => (state = (state * 16807) % 2147483647) / 2147483647;
		for (let round = 0; round < 30; round++) {
			const rows = Array.from({ length: 6 }, (_, i) => i + random() / 2);
			const columns = Array.from({ length: 7 }, (_, i) => 2 * i + random());
			const good = Array.from({ length: 42 }, () => (random() < 0.75 ? 1 : 0));
			expect(largestRectangle(good, rows, columns)?.area ?? 0).toBeCloseTo(brute(good, rows, columns), 12);
		}
	});
});

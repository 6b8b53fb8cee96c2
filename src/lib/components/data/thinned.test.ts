import { describe, expect, it } from 'vitest';
import { evenPlaces, pixelPlaces } from './thinned';

describe('places spread evenly over a long list', () => {
	it('are all of a short one', () => {
		expect(evenPlaces(4, 400)).toEqual([0, 1, 2, 3]);
		expect(evenPlaces(0, 400)).toEqual([]);
	});
	it('begin with the first, end with the last, and come once each', () => {
		const places = evenPlaces(20_000, 400);
		expect(places).toHaveLength(400);
		expect(new Set(places).size).toBe(400);
		expect([places[0], places.at(-1)]).toEqual([0, 19_999]);
	});
});

describe('points that fall on the same column of pixels', () => {
	const points = Array.from({ length: 20_000 }, (_, i) => ({ x: i / 100, y: i === 7_777 ? 90 : 100 + (i % 7) }));
	const pixelOf = (x: number) => x * 3;

	it('leave the lowest and the highest of each column: no excursion is lost', () => {
		const kept = pixelPlaces(points, pixelOf);
		expect(kept.length).toBeLessThan(4 * 601 + 1);
		expect(kept).toContain(7_777);
		expect([kept[0], kept.at(-1)]).toEqual([0, 19_999]);
		for (const column of [0, 100, 599]) {
			const of = (places: number[]) =>
				places.filter((i) => Math.round(pixelOf(points[i].x)) === column).map((i) => points[i].y);
			const all = of(points.map((_, i) => i));
			expect(Math.max(...of(kept))).toBe(Math.max(...all));
			expect(Math.min(...of(kept))).toBe(Math.min(...all));
		}
	});
	it('are all kept where each has a column of its own', () => {
		expect(pixelPlaces(points.slice(0, 50), (x) => x * 1000)).toHaveLength(50);
	});
});

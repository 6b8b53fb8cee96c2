import { describe, expect, it } from 'vitest';
import { emptyScheme, type SchemeContent } from '$lib/schemas/scheme';
import * as draft from './draft';
import { layoutScheme, type DrawnScheme } from './layout';

const start = (ids: string): SchemeContent =>
	[...ids].reduce((c, id) => draft.addSpecies(c, { id, name: '' }), emptyScheme());

function step(content: SchemeContent, from: string, to: string): SchemeContent {
	const before = draft.addStep(content, { reactant: from });
	const id = before.steps.at(-1)!.id;
	return [...to].reduce((c, p) => draft.place(c, id, 'product', p), before);
}

function overlaps(drawn: DrawnScheme): boolean {
	return drawn.nodes.some((a, i) =>
		drawn.nodes.some(
			(b, j) =>
				j > i &&
				Math.abs(a.x - b.x) < (a.width + b.width) / 2 &&
				Math.abs(a.y - b.y) < (a.height + b.height) / 2
		)
	);
}

describe('the drawn scheme', () => {
	it('runs from left to right and lays no species over another', () => {
		const drawn = layoutScheme(step(step(step(start('ABCD'), 'A', 'B'), 'B', 'C'), 'A', 'D'));
		const x = (id: string) => drawn.nodes.find((n) => n.species === id)!.x;
		expect(x('A')).toBeLessThan(x('B'));
		expect(x('B')).toBeLessThan(x('C'));
		expect(overlaps(drawn)).toBe(false);
	});
	it('draws two lines for a reversible step and one for the others', () => {
		let c = step(step(start('ABC'), 'A', 'B'), 'B', 'C');
		c = draft.setReversible(c, 's2', true);
		const [one, two] = layoutScheme(c).edges;
		expect(one.back).toBeNull();
		expect(two.back).not.toBeNull();
	});
	it('splits a step with two products at a junction, and gives a loss an end of its own', () => {
		let c = step(start('ABC'), 'A', 'BC');
		c = draft.setLoss(draft.addStep(c, { reactant: 'B' }), 's2', true);
		const drawn = layoutScheme(c);
		expect(drawn.nodes.filter((n) => n.kind === 'junction')).toHaveLength(1);
		expect(drawn.nodes.filter((n) => n.kind === 'loss')).toHaveLength(1);
		expect(drawn.edges.filter((e) => e.stepId === 's1')).toHaveLength(3);
		expect(drawn.edges.filter((e) => e.label)).toHaveLength(2);
	});
	it('keeps loops, parallel steps and everything drawn inside its box', () => {
		const c = step(step(step(step(start('ABC'), 'A', 'B'), 'B', 'C'), 'C', 'A'), 'A', 'B');
		const drawn = layoutScheme(c);
		expect(drawn.edges).toHaveLength(4);
		expect(new Set(drawn.edges.map((e) => e.path)).size).toBe(4);
		const [left, top, width, height] = drawn.box;
		for (const n of drawn.nodes) {
			expect(n.x - n.width / 2).toBeGreaterThanOrEqual(left);
			expect(n.x + n.width / 2).toBeLessThanOrEqual(left + width);
			expect(n.y - n.height / 2).toBeGreaterThanOrEqual(top);
			expect(n.y + n.height / 2).toBeLessThanOrEqual(top + height);
		}
	});
	it('leaves out what is in no step and what is not finished', () => {
		expect(layoutScheme(draft.addStep(start('AB'), { reactant: 'A' })).nodes).toEqual([]);
		expect(layoutScheme(emptyScheme()).edges).toEqual([]);
	});
});

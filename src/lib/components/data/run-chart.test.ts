import { describe, expect, it } from 'vitest';
import type { RunContent } from '$lib/schemas/run';
import { Exclusions } from './exclusions';
import { drawnWords, MOST_DRAWN, runSeries } from './run-chart';

const run = (rows: number, over: Partial<RunContent> = {}): RunContent => ({
	temperature: { value: 50, unit: 'degC' },
	initial: {},
	excess: {},
	timeUnit: 'h',
	channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }],
	timepoints: Array.from({ length: rows }, (_, i) => ({ time: i, values: { A: i === 1 ? { below: 0.1 } : i / 10 } })),
	...over
});
const left = (index: number, channel: string | null) =>
	({ index, channel, reasonCode: 'assay error', reason: 'vial open' }) as NonNullable<RunContent['exclusions']>[0];

describe('the points of a run in its chart', () => {
	it('are all drawn where they have room, limits as limits', () => {
		const [series] = runSeries(run(20), { A: 3 });
		expect(series.index).toBe(3);
		expect(series.points).toHaveLength(20);
		expect(series.points?.[1]).toMatchObject({ y: 0.1, below: true });
		expect(drawnWords(run(20))).toBeNull();
	});
	it('are spread evenly where there are thousands, which is said; none that is left out is missing', () => {
		const long = run(20_000, { exclusions: [left(7_777, 'A')] });
		const [series] = runSeries(long, {});
		expect(series.points).toHaveLength(MOST_DRAWN + 1);
		expect(series.points?.find((p) => p.x === 7_777)?.excluded).toBe(true);
		expect(series.points?.at(-1)?.x).toBe(19_999);
		expect(drawnWords(long)).toContain('301 of 20000 times');
	});
});

describe('what is left out of a run', () => {
	it('is a value, or a row with all its values', () => {
		const exclusions = new Exclusions(run(5, { exclusions: [left(2, null), left(3, 'A')] }));
		expect(exclusions.ofRow(2)?.channel).toBeNull();
		expect(exclusions.of(2, 'A')?.channel).toBeNull();
		expect(exclusions.of(3, 'A')?.channel).toBe('A');
		expect(exclusions.of(3, 'B')).toBeNull();
		expect(exclusions.ofRow(3)).toBeNull();
	});
});

import { describe, expect, it } from 'vitest';
import { clampWindow, earlier, further, WINDOW, windowAt } from './finding-window';

const start = { from: 0, to: WINDOW };

describe('the part of a list of findings that is drawn', () => {
	it('is the whole of a short list', () => {
		expect(clampWindow(start, 7)).toEqual({ from: 0, to: 7 });
		expect(clampWindow(start, 0)).toEqual({ from: 0, to: 0 });
	});
	it('stays where a finding is in it, and goes along to one far below', () => {
		expect(windowAt(5, start, 20_000)).toBe(start);
		const far = windowAt(19_999, start, 20_000);
		expect(far).toEqual({ from: 19_920, to: 20_000 });
		const middle = windowAt(9_000, far, 20_000);
		expect(middle.from).toBeLessThan(9_000);
		expect(middle.to - middle.from).toBe(WINDOW);
	});
	it('grows at either end on request, and comes back when the list shrinks', () => {
		const middle = windowAt(9_000, start, 20_000);
		expect(earlier(middle).from).toBe(middle.from - WINDOW);
		expect(clampWindow(further(middle), 20_000).to).toBe(middle.to + WINDOW);
		expect(earlier(start).from).toBe(0);
		expect(clampWindow(middle, 100)).toEqual({ from: 20, to: 100 });
	});
});

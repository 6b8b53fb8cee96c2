import { describe, expect, it } from 'vitest';
import { progressNote, shareDone, waitingWords } from './running';

describe('a fit under way', () => {
	it('shows the share that the engine states, else the count, else none', () => {
		expect(shareDone({ stage: 'search', done: 1, total: 20, fraction: 0.4 })).toBe(0.4);
		expect(shareDone({ stage: 'search', done: 5, total: 20 })).toBe(0.25);
		expect(shareDone({ stage: 'search', done: 5, total: 0 })).toBeNull();
		expect(shareDone(null)).toBeNull();
	});

	it('says its place in the queue', () => {
		expect(waitingWords(0)).toBe('waiting, next in turn');
		expect(waitingWords(1)).toMatch(/one fit comes before it/);
		expect(waitingWords(4)).toMatch(/4 fits come before it/);
		expect(waitingWords(null)).toBe('waiting for a free worker');
	});

	it('names the stage and the best misfit so far', () => {
		expect(progressNote({ stage: 'start 3 of 20', done: 3, total: 20, best: 0.000123456 })).toBe(
			'start 3 of 20, best sum of squares 0.0001235'
		);
		expect(progressNote(null)).toBe('begun');
	});
});

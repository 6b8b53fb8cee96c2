import { describe, expect, it } from 'vitest';
import { change, redo, startHistory, undo } from './undo';

describe('undo and redo', () => {
	it('go back and forth over every change', () => {
		let h = startHistory('a');
		h = change(h, 'b');
		h = change(h, 'c');
		h = undo(h);
		expect(h.present).toBe('b');
		h = undo(h);
		expect(h.present).toBe('a');
		expect(undo(h)).toBe(h);
		h = redo(redo(h));
		expect(h.present).toBe('c');
		expect(redo(h)).toBe(h);
	});
	it('forget what was undone once something new is done', () => {
		const h = change(undo(change(startHistory(1), 2)), 3);
		expect(h.future).toEqual([]);
		expect(undo(h).present).toBe(1);
	});
	it('take a dragged slider as one change, but not two drags a while apart', () => {
		let h = startHistory(0);
		h = change(h, 1, 'k1', 1000);
		h = change(h, 2, 'k1', 1100);
		h = change(h, 3, 'k1', 1200);
		expect(undo(h).present).toBe(0);
		h = change(h, 4, 'k1', 9000);
		expect(undo(h).present).toBe(3);
	});
	it('do not merge over an undo or over another key', () => {
		let h = change(startHistory(0), 1, 'k1', 1000);
		h = change(h, 2, 'k2', 1001);
		expect(undo(h).present).toBe(1);
		h = change(undo(h), 5, 'k2', 1002);
		expect(undo(h).present).toBe(1);
	});
	it('take no notice of a change that changes nothing', () => {
		const h = startHistory('a');
		expect(change(h, 'a')).toBe(h);
	});
});

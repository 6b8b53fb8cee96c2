import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { Autosave, type SaveOutcome } from './autosave';

beforeEach(() => void vi.useFakeTimers());
afterEach(() => void vi.useRealTimers());

function rig(outcomes: (SaveOutcome<string> | Error)[]) {
	const calls: [string, number][] = [];
	const statuses: string[] = [];
	const conflicts: string[] = [];
	const autosave = new Autosave<string, string>({
		version: 1,
		delayMs: 100,
		retryMs: [1000, 2000],
		save: (content, version) => {
			calls.push([content, version]);
			const next = outcomes.shift() ?? { kind: 'saved', version: version + 1 };
			return next instanceof Error ? Promise.reject(next) : Promise.resolve(next);
		},
		onstatus: (status) => statuses.push(status),
		onconflict: (theirs) => conflicts.push(theirs)
	});
	return { autosave, calls, statuses, conflicts };
}

describe('a draft that saves itself', () => {
	it('saves once, a moment after the last of several changes', async () => {
		const { autosave, calls, statuses } = rig([]);
		autosave.queue('a');
		autosave.queue('ab');
		await vi.advanceTimersByTimeAsync(99);
		expect(calls).toEqual([]);
		await vi.advanceTimersByTimeAsync(1);
		expect(calls).toEqual([['ab', 1]]);
		expect(statuses.at(-1)).toBe('saved');
		expect(autosave.dirty).toBe(false);
	});
	it('names the version that the last save made', async () => {
		const { autosave, calls } = rig([]);
		autosave.queue('a');
		await vi.advanceTimersByTimeAsync(100);
		autosave.queue('b');
		await vi.advanceTimersByTimeAsync(100);
		expect(calls).toEqual([
			['a', 1],
			['b', 2]
		]);
	});
	it('tries again after a lost connection, with the newest content, ever more slowly', async () => {
		const { autosave, calls, statuses } = rig([new Error('offline'), new Error('offline')]);
		autosave.queue('a');
		await vi.advanceTimersByTimeAsync(100);
		expect(statuses.at(-1)).toBe('failed');
		expect(autosave.dirty).toBe(true);
		await vi.advanceTimersByTimeAsync(1000);
		expect(calls).toHaveLength(2);
		await vi.advanceTimersByTimeAsync(1999);
		expect(calls).toHaveLength(2);
		await vi.advanceTimersByTimeAsync(1);
		expect(calls).toHaveLength(3);
		expect(statuses.at(-1)).toBe('saved');
	});
	it('stops at a conflict and overwrites nothing until the person has chosen', async () => {
		const { autosave, calls, statuses, conflicts } = rig([{ kind: 'conflict', theirs: 'their scheme' }]);
		autosave.queue('mine');
		await vi.advanceTimersByTimeAsync(100);
		expect(conflicts).toEqual(['their scheme']);
		autosave.queue('mine, changed on');
		await vi.advanceTimersByTimeAsync(60_000);
		expect(calls).toHaveLength(1);
		expect(statuses.at(-1)).toBe('conflict');
		autosave.resume(7);
		autosave.queue('mine, on top');
		await vi.advanceTimersByTimeAsync(100);
		expect(calls.at(-1)).toEqual(['mine, on top', 7]);
	});
	it('does not repeat what the service refused for its content', async () => {
		const { autosave, calls } = rig([{ kind: 'failed', message: 'not valid', again: false }]);
		autosave.queue('a');
		await vi.advanceTimersByTimeAsync(60_000);
		expect(calls).toHaveLength(1);
	});
	it('saves at once when asked, and what was changed while saving goes next', async () => {
		const { autosave, calls } = rig([]);
		autosave.queue('a');
		const first = autosave.flush();
		autosave.queue('b');
		await first;
		await vi.advanceTimersByTimeAsync(100);
		expect(calls.map(([content]) => content)).toEqual(['a', 'b']);
	});
});

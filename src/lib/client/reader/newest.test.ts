import { describe, expect, it, vi } from 'vitest';
import { Newest } from './newest';

/** Asks that are answered when the test says so. */
function held() {
	const begun: { ask: string; answer: (value: string) => void; fail: (error: Error) => void }[] = [];
	const answers: [string, string][] = [];
	const failed = vi.fn();
	const newest = new Newest<string, string>({
		run: (ask) => new Promise((answer, fail) => begun.push({ ask, answer, fail })),
		onanswer: (ask, answer) => answers.push([ask, answer]),
		onfailed: failed
	});
	return { newest, begun, answers, failed };
}
const turn = () => new Promise((go) => setTimeout(go));

describe('the newest of many asks', () => {
	it('gives the answer of a single ask', async () => {
		const { newest, begun, answers } = held();
		newest.put('a');
		expect(newest.busy).toBe(true);
		begun[0].answer('A');
		await newest.done();
		expect(answers).toEqual([['a', 'A']]);
		expect(newest.busy).toBe(false);
	});

	it('never begins what was overtaken while it waited, and drops an answer that was overtaken', async () => {
		const { newest, begun, answers } = held();
		for (const ask of ['a', 'b', 'c']) newest.put(ask);
		expect(begun.map((b) => b.ask)).toEqual(['a']);
		begun[0].answer('A');
		await turn();
		expect(begun.map((b) => b.ask)).toEqual(['a', 'c']);
		begun[1].answer('C');
		await newest.done();
		expect(answers).toEqual([['c', 'C']]);
	});

	it('says when the newest is answered, not when an older one is', async () => {
		const { newest, begun } = held();
		newest.put('a');
		const done = vi.fn();
		void newest.done().then(done);
		newest.put('b');
		begun[0].answer('A');
		await turn();
		expect(done).not.toHaveBeenCalled();
		begun[1].answer('B');
		await turn();
		expect(done).toHaveBeenCalledOnce();
	});

	it('tells of a failure, unless it was overtaken, and goes on', async () => {
		const { newest, begun, answers, failed } = held();
		newest.put('a');
		newest.put('b');
		begun[0].fail(new Error('overtaken'));
		await turn();
		expect(failed).not.toHaveBeenCalled();
		begun[1].fail(new Error('no room'));
		await newest.done();
		expect(failed).toHaveBeenCalledExactlyOnceWith('b', new Error('no room'));
		newest.put('c');
		begun[2].answer('C');
		await newest.done();
		expect(answers).toEqual([['c', 'C']]);
	});
});

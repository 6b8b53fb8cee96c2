import { describe, expect, it } from 'vitest';
import { propose, settle } from '$lib/assay';
import type { SpeciesContent } from '$lib/schemas/scheme';
import type { GridRow, GridWorkbook } from '$lib/schemas/sheet';
import type { Call, Reply } from './messages';
import { startReader, type ReaderWorker } from './reader';
import { Examiner } from './tasks';

const rows: GridRow[] = [
	{
		r: 1,
		c: [
			[1, 'time (h)'],
			[2, 'A (mol/L)'],
			[3, 'B (mol/L)']
		]
	},
	...[0, 1, 2, 3, 4, 5].map((t): GridRow => ({
		r: t + 2,
		c: [
			[1, t],
			[2, Number((0.5 * 0.6 ** t).toFixed(3))],
			[3, Number((0.5 - 0.5 * 0.6 ** t).toFixed(3))]
		]
	}))
];
const workbook: GridWorkbook = {
	fileName: 'run.csv',
	kind: 'text',
	dateSystem: 1900,
	styles: [],
	sheets: [
		{
			name: 'run',
			state: 'visible',
			rows,
			merges: [],
			hiddenRows: [],
			hiddenColumns: [],
			filter: null,
			lastRow: 7,
			lastColumn: 3
		}
	]
};
const species = ['A', 'B'].map((id): SpeciesContent => ({ id, name: '', role: 'intermediate' }));
const opening = { workbookJson: JSON.stringify(workbook), species, saved: [] };
const conditions = {
	temperature: { value: 50, unit: 'degC' },
	initial: { A: { value: 0.5, unit: 'mol/L' } },
	excess: {}
};
const decided = () => {
	const { mapping } = propose(workbook, species).tables[0];
	return { mapping: { ...mapping, conditions }, answers: {}, corrections: [] };
};

/** A worker by its messages; `dieAt`: the call at which it ends without an answer. */
class Double implements ReaderWorker {
	onmessage: ReaderWorker['onmessage'] = null;
	onerror: ReaderWorker['onerror'] = null;
	onmessageerror: ReaderWorker['onmessageerror'] = null;
	terminated = false;
	calls: string[] = [];
	private readonly examiner = new Examiner();
	constructor(private readonly dieAt = Infinity) {}

	postMessage(message: unknown) {
		const call = structuredClone(message) as Call;
		this.calls.push(call.name);
		const dies = this.calls.length >= this.dieAt;
		setTimeout(() => (dies ? this.die() : this.say(call)));
	}
	terminate() {
		this.terminated = true;
	}
	private die() {
		if (!this.terminated) this.onerror?.call(this as never, {} as ErrorEvent);
	}
	private say({ id, name, task }: Call) {
		let data: Reply;
		try {
			data = structuredClone({ id, value: this.examiner.perform(name, task) });
		} catch (error) {
			data = { id, failed: (error as Error).message };
		}
		this.onmessage?.call(this as never, { data } as MessageEvent<Reply>);
	}
}

describe('the reader of a page', () => {
	it('proposes and settles in the worker what the reader would say, without the points', async () => {
		const worker = new Double();
		const reader = startReader(() => worker);
		expect(await reader.ask('open', opening)).toEqual(propose(workbook, species));
		const settled = await reader.ask('settle', decided());
		const whole = settle({ workbook, species, ...decided() });
		expect(settled.findings).toEqual(whole.findings);
		expect(settled).toMatchObject({ open: whole.open, ready: whole.run !== null, log: null });
		expect(settled.balance).toBe(whole.massBalance?.message);
		expect(Object.keys(settled)).not.toContain('preview');
		expect(worker.calls).toEqual(['open', 'settle']);
		reader.close();
		expect(worker.terminated).toBe(true);
	});

	it('proposes a block that was drawn by hand', async () => {
		const reader = startReader(() => new Double());
		await reader.ask('open', opening);
		const block = { firstRow: 3, lastRow: 6, firstColumn: 1, lastColumn: 2 };
		const table = await reader.ask('draw', { key: 't2', sheet: 'run', block, headerRows: [1] });
		expect(table?.id).toBe('t2');
		expect(table?.mapping.columns.map((c) => c.role)).toEqual(['time', 'species']);
	});

	it('does the same on the page itself where no worker is to be had', async () => {
		const reader = startReader(() => null);
		const asked = [reader.ask('open', opening), reader.ask('settle', decided())] as const;
		expect(await asked[0]).toEqual(propose(workbook, species));
		expect((await asked[1]).ready).toBe(true);
	});

	it.each([
		['before it said anything', 1],
		['after it had opened the sheet', 2]
	])('takes over from a worker that dies %s', async (_when, dieAt) => {
		const worker = new Double(dieAt);
		const reader = startReader(() => worker);
		const asked = [reader.ask('open', opening), reader.ask('settle', decided())] as const;
		expect((await asked[0]).tables).toHaveLength(1);
		expect((await asked[1]).ready).toBe(true);
		expect(worker.terminated).toBe(true);
		expect((await reader.ask('settle', decided())).open).toBe(0);
	});

	it('hands a fault of the reader on to whoever asked, and lives on', async () => {
		for (const start of [() => new Double(), () => null]) {
			const reader = startReader(start);
			await expect(reader.ask('settle', decided())).rejects.toThrow('No sheet was opened');
			expect((await reader.ask('open', opening)).tables).toHaveLength(1);
		}
	});
});

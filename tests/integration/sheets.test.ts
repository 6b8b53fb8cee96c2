import { readFileSync } from 'node:fs';
import { beforeAll, describe, expect, it } from 'vitest';
import { makeWork } from './support/work';
import { AuditEvent, Mapping, RunRevision, Sheet, type Group } from '../../src/lib/server/database/models';
import type { Actor } from '../../src/lib/server/policy';
import { readRun } from '../../src/lib/server/runs/read-run';
import { resetSettings } from '../../src/lib/server/settings';
import { confirmRun } from '../../src/lib/server/sheets/confirm-run';
import { downloadSheet } from '../../src/lib/server/sheets/download-sheet';
import { listSheets } from '../../src/lib/server/sheets/list-sheets';
import { readReading } from '../../src/lib/server/sheets/read-reading';
import { readSheet } from '../../src/lib/server/sheets/read-sheet';
import { receiveSheet } from '../../src/lib/server/sheets/receive-sheet';
import { saveSheetWork } from '../../src/lib/server/sheets/save-sheet-work';
import { readStudy } from '../../src/lib/server/studies/read-study';
import { makeActor, makeGroup, openTestDatabase } from './support';

const test = openTestDatabase();

let group: Group;
let chemist: Actor;
beforeAll(async () => {
	group = await makeGroup();
	chemist = await makeActor(group);
});

const CLEAN = readFileSync('tests/fixtures/s01_clean_50C.csv');
const MESSY = readFileSync('tests/fixtures/s02_messy.xlsx');
const CONDITIONS = {
	temperature: { value: 50, unit: 'degC' },
	initial: { A: { value: 0.5, unit: 'mol/L' } },
	excess: {},
	timeZero: 'end of the addition'
};

const bytes = (text: string) => new TextEncoder().encode(text);
const study = async () => (await makeWork(chemist, group.id, { runs: [] })).studyId;
const receive = (studyId: string, fileName: string, content: Uint8Array) =>
	receiveSheet(chemist, { studyId, fileName, bytes: content });

describe('a sheet that is received', () => {
	it('is kept byte for byte with its checksum, and comes back so', async () => {
		const studyId = await study();
		const got = await receive(studyId, 'messy.xlsx', MESSY);
		expect(got).toMatchObject({ fileName: 'messy.xlsx', size: MESSY.length, duplicateOf: null });
		const file = await downloadSheet(chemist, got.id);
		expect(file.bytes.equals(MESSY)).toBe(true);
		expect(file.sha256).toBe(got.sha256);
		const entries = await AuditEvent.findAll({ where: { objectId: got.id }, order: [['seq', 'ASC']] });
		expect(entries.map((e) => e.type)).toEqual(['sheet.received', 'sheet.downloaded']);
	});

	it('cannot be changed or removed afterwards, not even in the database', async () => {
		const got = await receive(await study(), 'clean.csv', CLEAN);
		const { sequelize } = test.database();
		for (const sql of ["UPDATE sheets SET bytes = x'00' WHERE id = ?", 'DELETE FROM sheets WHERE id = ?'])
			await expect(sequelize.query(sql, { replacements: [got.id] })).rejects.toMatchObject({
				original: { message: expect.stringContaining('as received') as string }
			});
	});

	it('says what was read and what it asks, with cells', async () => {
		const got = await receive(await study(), 'messy.xlsx', MESSY);
		const [table] = got.proposal.tables;
		expect(table.range).toBe('A6:H20');
		const stops = table.findings.filter((f) => f.level === 'stop').map((f) => f.cells[0]);
		expect(stops).toEqual(expect.arrayContaining(['A14', 'F20']));
		expect(got.open).toBeGreaterThan(4);
	});

	it('with the same bytes as one before leads to that one and is not kept twice', async () => {
		const studyId = await study();
		const first = await receive(studyId, 'clean.csv', CLEAN);
		await confirmRun(chemist, { sheetId: first.id, tableKey: 't1', conditions: CONDITIONS });
		const again = await receive(studyId, 'copy of clean.csv', CLEAN);
		expect(again.id).toBe(first.id);
		expect(again.duplicateOf).toMatchObject({ sheetId: first.id, fileName: 'clean.csv', runs: [1] });
		expect(again.duplicateOf!.message).toContain('already read as clean.csv');
		expect(await Sheet.count({ where: { studyId } })).toBe(1);
	});

	it.each([
		['a picture', Buffer.from('89504e470d0a1a0a0000', 'hex'), 'unsupported-file', 'not-a-sheet'],
		['nothing', Buffer.alloc(0), 'unsupported-file', 'empty']
	])('that is %s is refused in words and noted, but not kept', async (_what, content, code, refused) => {
		const studyId = await study();
		await expect(receive(studyId, '../../etc/sheet.xlsx', content)).rejects.toMatchObject({
			code,
			options: { data: { refused } }
		});
		expect(await Sheet.count({ where: { studyId } })).toBe(0);
		const entry = await AuditEvent.findOne({ where: { studyId, type: 'sheet.refused' } });
		expect(JSON.parse(entry!.payload)).toMatchObject({ fileName: 'sheet.xlsx', code: refused });
	});

	it('larger than the limit of the settings is refused', async () => {
		process.env.UPLOAD_LIMIT_MB = '1';
		resetSettings();
		const studyId = await study();
		await expect(receive(studyId, 'big.csv', new Uint8Array(1_100_000).fill(49))).rejects.toMatchObject({
			code: 'too-large'
		});
		delete process.env.UPLOAD_LIMIT_MB;
		resetSettings();
	});
});

describe('from a sheet to a run', () => {
	it('a clean table becomes a run with the cell of each value, once the conditions are given', async () => {
		const studyId = await study();
		const sheet = await receive(studyId, 'clean.csv', CLEAN);
		await expect(confirmRun(chemist, { sheetId: sheet.id, tableKey: 't1' })).rejects.toMatchObject({
			code: 'invalid',
			options: {
				fields: [{ field: 'conditions.temperature' }, { field: 'conditions.initial' }]
			}
		});
		const made = await confirmRun(chemist, {
			sheetId: sheet.id,
			tableKey: 't1',
			conditions: CONDITIONS,
			name: 'Run at 50 °C'
		});
		expect(made).toMatchObject({ number: 1, revision: 1, name: 'Run at 50 °C' });
		const run = await readRun(chemist, made.id);
		expect(run.content.timepoints).toHaveLength(12);
		expect(run.content.timepoints[1]).toMatchObject({
			time: 0.25,
			values: { A: 0.401, B: 0.078, C: 0.007 },
			source: { row: 3, cells: { A: 'B3', B: 'C3', C: 'D3' } }
		});
		expect(run.content.timeZero).toBe('end of the addition');
		expect(run.sheet).toMatchObject({ id: sheet.id, fileName: 'clean.csv' });
	});

	it('a run is refused while a question is open, and the refusal names sheet and cell', async () => {
		const studyId = await study();
		const sheet = await receive(studyId, 'messy.xlsx', MESSY);
		const refused = confirmRun(chemist, { sheetId: sheet.id, tableKey: 't1', conditions: CONDITIONS });
		await expect(refused).rejects.toMatchObject({
			code: 'invalid',
			options: {
				fields: expect.arrayContaining([
					expect.objectContaining({ field: '50°C!A14' }),
					expect.objectContaining({ field: '50°C!F20' })
				]) as unknown
			}
		});
		expect(await RunRevision.count({ where: { sheetId: sheet.id } })).toBe(0);
	});

	it('one table makes one run; read again it becomes a revision, with a reason', async () => {
		const studyId = await study();
		const sheet = await receive(studyId, 'clean.csv', CLEAN);
		const confirm = { sheetId: sheet.id, tableKey: 't1', conditions: CONDITIONS };
		const made = await confirmRun(chemist, confirm);
		await expect(confirmRun(chemist, confirm)).rejects.toMatchObject({
			code: 'conflict',
			options: { data: { runId: made.id, number: 1 } }
		});
		const warmer = { ...CONDITIONS, temperature: { value: 51, unit: 'degC' } };
		const revised = await confirmRun(chemist, {
			...confirm,
			conditions: warmer,
			revisionOf: { runId: made.id, version: made.version, reason: 'the thermometer was recalibrated' }
		});
		expect(revised).toMatchObject({ id: made.id, number: 1, revision: 2 });
		const run = await readRun(chemist, made.id);
		expect(run.revisions[0]).toMatchObject({
			reason: 'the thermometer was recalibrated',
			differences: [{ field: 'temperature' }]
		});
	});

	it('the next sheet of the group with exactly these headers begins with the confirmed mapping', async () => {
		const own = await makeGroup();
		const actor = await makeActor(own);
		const work = await makeWork(actor, own.id, { runs: [] });
		const put = (name: string, text: string) =>
			receiveSheet(actor, { studyId: work.studyId, fileName: name, bytes: bytes(text) });
		const first = await put(
			'one.csv',
			'Time (h),peak one (mol/L),note\n0,0.5,a\n1,0.3,b\n2,0.2,c\n3,0.1,d\n4,0.05,e\n'
		);
		const mapping = structuredClone(first.proposal.tables[0].mapping);
		mapping.columns[1] = { ...mapping.columns[1], role: 'species', weights: { A: 1 }, unit: 'mol/L' };
		await confirmRun(actor, { sheetId: first.id, tableKey: 't1', mapping, conditions: CONDITIONS });
		expect(await Mapping.count({ where: { groupId: own.id } })).toBe(1);
		const second = await put(
			'two.csv',
			'Time (h),peak one (mol/L),note\n0,0.5,a\n1,0.31,b\n2,0.2,c\n3,0.1,d\n4,0.05,e\n'
		);
		expect(second.proposal.tables[0].savedMapping).toBeTruthy();
		expect(second.proposal.tables[0].mapping.columns[1].weights).toEqual({ A: 1 });
		const other = await put(
			'three.csv',
			'Time (h),peak 1 (mol/L),note\n0,0.5,a\n1,0.31,b\n2,0.2,c\n3,0.1,d\n4,0.05,e\n'
		);
		expect(other.proposal.tables[0].savedMapping).toBeUndefined();
	});
});

describe('work on a sheet', () => {
	it('is kept beside it; open questions are counted on the strip until the run is made', async () => {
		const studyId = await study();
		const sheet = await receive(studyId, 'messy.xlsx', MESSY);
		const before = await readStudy(chemist, studyId);
		expect(before.stations.data).toMatch(/^1 sheet, no run yet, \d+ queries open$/);
		const view = await readSheet(chemist, sheet.id);
		const [table] = sheet.proposal.tables;
		const date = table.findings.find((f) => f.cells[0] === 'F20')!;
		const answers = { [date.id]: { key: 'missing' } };
		const work = { tables: { t1: { mapping: table.mapping, answers, corrections: [], name: '' } } };
		const saved = await saveSheetWork(chemist, { sheetId: sheet.id, version: view.version, work });
		expect(saved.open).toBeLessThan(sheet.open);
		expect((await readSheet(chemist, sheet.id)).work.tables.t1.answers).toEqual(answers);
		await expect(
			saveSheetWork(chemist, { sheetId: sheet.id, version: view.version, work: { tables: {} } })
		).rejects.toMatchObject({ code: 'version-changed', options: { data: { work: { tables: { t1: {} } } } } });
	});

	it('nothing is open any more once the run is made', async () => {
		const studyId = await study();
		const sheet = await receive(studyId, 'clean.csv', CLEAN);
		await confirmRun(chemist, { sheetId: sheet.id, tableKey: 't1', conditions: CONDITIONS });
		const [listed] = await listSheets(chemist, studyId);
		expect(listed).toMatchObject({ open: 0, runs: [{ number: 1 }] });
		expect((await readStudy(chemist, studyId)).stations.data).toBe('1 run');
	});

	it('corrections carry the name of who made them, whatever was sent', async () => {
		const studyId = await study();
		const sheet = await receive(studyId, 'clean.csv', CLEAN);
		const made = await confirmRun(chemist, {
			sheetId: sheet.id,
			tableKey: 't1',
			conditions: CONDITIONS,
			corrections: [
				{
					sheet: sheet.proposal.tables[0].sheet,
					cell: 'B3',
					original: '0.401',
					corrected: '0.402',
					reason: 'transcribed wrongly from the notebook',
					by: 'Somebody Else'
				}
			]
		});
		const run = await readRun(chemist, made.id);
		expect(run.content.timepoints[1].values.A).toBe(0.402);
		expect(run.content.corrections).toMatchObject([{ cell: 'B3', by: chemist.name }]);
	});

	it('of another group is not there; a QA reviewer may look and download, not answer', async () => {
		const studyId = await study();
		const sheet = await receive(studyId, 'clean.csv', CLEAN);
		const other = await makeActor(await makeGroup());
		const attempts = [
			readSheet(other, sheet.id),
			readReading(other, studyId, sheet.id),
			downloadSheet(other, sheet.id),
			saveSheetWork(other, { sheetId: sheet.id, version: 1, work: { tables: {} } }),
			confirmRun(other, { sheetId: sheet.id, tableKey: 't1', conditions: CONDITIONS })
		];
		await Promise.all(attempts.map((one) => expect(one).rejects.toMatchObject({ code: 'not-found' })));
		const qa = await makeActor(group, 'qa_reviewer');
		const seen = await readSheet(qa, sheet.id);
		expect(seen.canWrite).toBe(false);
		expect(JSON.parse(await readReading(qa, studyId, sheet.id))).toEqual(seen.workbook);
		await expect(readReading(qa, await study(), sheet.id)).rejects.toMatchObject({ code: 'not-found' });
		expect((await downloadSheet(qa, sheet.id)).bytes.length).toBe(CLEAN.length);
		await expect(
			confirmRun(qa, { sheetId: sheet.id, tableKey: 't1', conditions: CONDITIONS })
		).rejects.toMatchObject({ code: 'not-allowed' });
	});
});

describe('story H2, the messy workbook (invented)', () => {
	/** Presses of a chemist who knows the lab: which option of which question. */
	const PRESSES: [cell: string, rule: string, key: RegExp][] = [
		['A14', 'B18', /^enter$/],
		['F20', 'B24', /^missing$/],
		['', 'B1', /^right$/],
		['', 'B3', /mmol/],
		['', 'B8', /^limit$/],
		['F13', 'B5', /^accept$/],
		['', 'B9', /^not-detected$/],
		['', 'B10', /^between$/],
		['', 'B19', /^samples$/],
		['', 'B13', /^samples$/]
	];

	it('answered in full becomes a run of 14 rows: 35 numbers (one had its unit in the cell), 6 limits, 1 missing', async () => {
		const studyId = await study();
		const sheet = await receive(studyId, 'messy.xlsx', MESSY);
		const [table] = sheet.proposal.tables;
		const answers: Record<string, { key: string; values?: Record<string, string | number> }> = {};
		for (const finding of table.findings.filter((f) => f.open)) {
			const press = PRESSES.find(
				([cell, rule]) => rule === finding.rule && (!cell || finding.cells[0] === cell)
			);
			const option = finding.options.find((o) => press?.[2].test(o.key));
			if (!option) continue;
			const values = Object.fromEntries((option.needsValue ?? []).map((f) => [f.key, f.suggested ?? '']));
			answers[finding.id] = { key: option.key, ...(option.needsValue ? { values } : {}) };
		}
		const made = await confirmRun(chemist, {
			sheetId: sheet.id,
			tableKey: table.id,
			conditions: CONDITIONS,
			answers
		});
		const { content } = await readRun(chemist, made.id);
		expect(content.timepoints).toHaveLength(14);
		expect(new Set(content.timepoints.map((p) => p.time)).size).toBe(13);
		const values = content.timepoints.flatMap((p) => content.channels.map((c) => p.values[c.id] ?? null));
		expect(values.filter((v) => typeof v === 'number')).toHaveLength(35);
		expect(values.filter((v) => v !== null && typeof v === 'object')).toHaveLength(6);
		expect(values.filter((v) => v === null)).toHaveLength(1);
		expect(content.timepoints.at(-1)?.time).toBe(26);
		expect(content.corrections?.every((c) => c.by === chemist.name)).toBe(true);
		// A value entered as an answer lies over the cell with name and time, like any correction.
		expect(content.corrections).toMatchObject([{ cell: 'A14', by: chemist.name }]);
		expect(content.corrections?.[0].at).toMatch(/^\d{4}-/);
		// The next reader of the record sees what was done: the day 25:00, the text number, the unit in the cell.
		expect(content.conversions?.length).toBeGreaterThan(2);
	});
});

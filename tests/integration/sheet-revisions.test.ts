import { readFileSync } from 'node:fs';
import { beforeAll, describe, expect, it } from 'vitest';
import { makeWork } from './support/work';
import { Mapping, type Group } from '../../src/lib/server/database/models';
import { planFit } from '../../src/lib/server/fits/plan-fit';
import type { Actor } from '../../src/lib/server/policy';
import { chooseTemperature } from '../../src/lib/server/runs/choose-temperature';
import { excludePoint } from '../../src/lib/server/runs/exclude-point';
import { readRun } from '../../src/lib/server/runs/read-run';
import { compareSheets } from '../../src/lib/server/sheets/compare-sheets';
import { confirmRun } from '../../src/lib/server/sheets/confirm-run';
import { readSheet } from '../../src/lib/server/sheets/read-sheet';
import { receiveSheet } from '../../src/lib/server/sheets/receive-sheet';
import { saveSheetWork } from '../../src/lib/server/sheets/save-sheet-work';
import { makeActor, makeGroup, openTestDatabase } from './support';

openTestDatabase();

let group: Group;
let chemist: Actor;
let colleague: Actor;
beforeAll(async () => {
	group = await makeGroup();
	chemist = await makeActor(group);
	colleague = await makeActor(group);
});

const CLEAN = readFileSync('tests/fixtures/s01_clean_50C.csv', 'utf8');
const CONDITIONS = {
	temperature: { value: 50, unit: 'degC' },
	initial: { A: { value: 0.5, unit: 'mol/L' } },
	excess: {}
};
const work = () => makeWork(chemist, group.id, { runs: [] });
const receive = (studyId: string, fileName: string, text: string) =>
	receiveSheet(chemist, { studyId, fileName, bytes: new TextEncoder().encode(text) });

/** Times, one species and a temperature log that ends at the last reading given. */
const logged = (last: number) =>
	['time (h),A (mol/L),B (mol/L),C (mol/L),T (°C)']
		.concat(
			[0, 1, 2, 3, 4, 6].map(
				(t) => `${t},${(0.5 * Math.exp(-t)).toFixed(4)},0.1,0.05,${t === 6 ? last : 50.2}`
			)
		)
		.join('\n');

async function runOf(studyId: string, fileName: string, text: string, conditions: object = {}) {
	const sheet = await receive(studyId, fileName, text);
	const [table] = sheet.proposal.tables;
	const open = table.findings.filter((f) => f.open);
	const made = await confirmRun(chemist, {
		sheetId: sheet.id,
		tableKey: table.id,
		conditions: { ...CONDITIONS, ...conditions },
		answers: Object.fromEntries(open.map((f) => [f.id, { key: f.options[0].key }]))
	});
	return { sheet, made };
}

describe('a changed file for a run', () => {
	it('is compared cell by cell before it is confirmed, and stands with its file in the history', async () => {
		const { studyId } = await work();
		const { sheet, made } = await runOf(studyId, 'first.csv', CLEAN);
		const lines = CLEAN.split('\n');
		const row = lines.findIndex((line) => line.startsWith('1'));
		const cells = lines[row].split(',');
		cells[1] = '0.9999';
		lines[row] = cells.join(',');
		const next = await receive(studyId, 'issued again.csv', lines.join('\n'));
		const comparison = await compareSheets(chemist, { sheetId: next.id, runId: made.id });
		expect(comparison).toMatchObject({ before: { id: sheet.id }, after: { id: next.id }, fits: [] });
		expect(comparison.difference.changes).toMatchObject([{ cell: `B${row + 1}`, after: '0.9999' }]);
		expect((await readSheet(chemist, next.id)).studyRuns).toMatchObject([
			{ number: 1, fileName: 'first.csv' }
		]);
		await confirmRun(chemist, {
			sheetId: next.id,
			tableKey: 't1',
			conditions: CONDITIONS,
			revisionOf: { runId: made.id, version: 1, reason: 'Calibration was issued anew.' }
		});
		const run = await readRun(chemist, made.id);
		expect(run.revisions.map((r) => r.file)).toEqual([
			{ id: next.id, fileName: 'issued again.csv', previousId: sheet.id },
			{ id: sheet.id, fileName: 'first.csv', previousId: null }
		]);
		expect(run.revisions[0].differences).toHaveLength(1);
	});

	it('keeps out what was left out, unless that value itself changed', async () => {
		const { studyId } = await work();
		const { made } = await runOf(studyId, 'first.csv', CLEAN);
		const out = { runId: made.id, reasonCode: 'assay error', reason: 'peak cut wrongly' } as const;
		await excludePoint(chemist, { ...out, version: 1, index: 2, channel: 'A' });
		await excludePoint(chemist, { ...out, version: 2, index: 5, channel: 'A' });
		const before = await readRun(chemist, made.id);
		const value = JSON.stringify(before.content.timepoints[5].values.A);
		expect(CLEAN.split(value)).toHaveLength(2);
		const next = await receive(studyId, 'changed.csv', CLEAN.replace(value, '0.4567'));
		await confirmRun(chemist, {
			sheetId: next.id,
			tableKey: 't1',
			conditions: CONDITIONS,
			revisionOf: { runId: made.id, version: 3, reason: 'Sample was injected again.' }
		});
		const { content, revisions } = await readRun(chemist, made.id);
		expect(content.exclusions?.map((e) => e.index)).toEqual([2]);
		expect(revisions[0].differences.map((d) => d.to)).toContain('used');
	});

	it('that gives the same numbers is no revision', async () => {
		const { studyId } = await work();
		const { sheet, made } = await runOf(studyId, 'first.csv', CLEAN);
		await expect(
			confirmRun(chemist, {
				sheetId: sheet.id,
				tableKey: 't1',
				conditions: CONDITIONS,
				revisionOf: { runId: made.id, version: 1, reason: 'Read it once more.' }
			})
		).rejects.toThrow('nothing to revise');
	});

	it('of another study or group is not compared', async () => {
		const one = await runOf((await work()).studyId, 'first.csv', CLEAN);
		const two = await receive((await work()).studyId, 'second.csv', `${CLEAN}\n`);
		await expect(compareSheets(chemist, { sheetId: two.id, runId: one.made.id })).rejects.toMatchObject({
			code: 'not-found'
		});
		await expect(
			compareSheets(chemist, { sheetId: two.id, fromSheetId: one.sheet.id })
		).rejects.toMatchObject({ code: 'not-found' });
		const stranger = await makeActor(await makeGroup());
		await expect(
			compareSheets(stranger, { sheetId: one.sheet.id, fromSheetId: one.sheet.id })
		).rejects.toMatchObject({ code: 'not-found' });
	});
});

describe('the measured temperature log', () => {
	it.each([
		['within 1 °C of the stated temperature is on the record only', 50.9, undefined, false],
		['beyond 1 °C is the program of the run', 57.3, undefined, true],
		['is on the record only where a person says so', 57.3, false, false],
		['is the program where a person says so', 50.9, true, true]
	])('%s, and the fit says which', async (_what, last, chosen, used) => {
		const { studyId, schemeId } = await work();
		const { made } = await runOf(
			studyId,
			'logged.csv',
			logged(last),
			chosen === undefined ? {} : { useTemperatureLog: chosen }
		);
		const { content } = await readRun(chemist, made.id);
		expect(content.temperatureLog).toHaveLength(6);
		expect(content.useTemperatureLog).toBe(used);
		const plan = await planFit(chemist, { studyId, schemeId, runIds: [made.id] });
		const codes = plan.issues.map((issue) => issue.code);
		expect(codes).toContain(used ? 'temperature-log-used' : 'temperature-stated');
	});
});

describe('what is decided on a sheet', () => {
	it('a correction keeps the name of who made it when somebody else goes on', async () => {
		const { studyId } = await work();
		const sheet = await receive(studyId, 'clean.csv', CLEAN);
		const [table] = sheet.proposal.tables;
		const correction = {
			sheet: table.sheet,
			cell: 'B3',
			original: '0.401',
			corrected: '0.402',
			reason: 'transcribed wrongly from the notebook'
		};
		const own = { mapping: table.mapping, answers: {}, name: '' };
		await saveSheetWork(chemist, {
			sheetId: sheet.id,
			version: 1,
			work: { tables: { t1: { ...own, corrections: [correction] } } }
		});
		const second = { ...correction, cell: 'B4', by: 'Somebody Else' };
		await saveSheetWork(colleague, {
			sheetId: sheet.id,
			version: 2,
			work: { tables: { t1: { ...own, corrections: [correction, second] } } }
		});
		const kept = (await readSheet(chemist, sheet.id)).work.tables.t1.corrections;
		expect(kept.map((c) => [c.cell, c.by])).toEqual([
			['B3', chemist.name],
			['B4', colleague.name]
		]);
		expect(kept.every((c) => !Number.isNaN(Date.parse(c.at ?? '')))).toBe(true);
	});

	it('whether equal times are samples or injections is asked once and kept with the mapping', async () => {
		const { studyId } = await work();
		const rows = ['0,0.5,0.01', '1,0.3,0.2', '1,0.31,0.21', '2,0.2,0.3', '3,0.1,0.4', '4,0.06,0.42'];
		const table = (last: string) => ['time (h),A (mol/L),B (mol/L)', ...rows, last].join('\n');
		const sheet = await receive(studyId, 'first.csv', table('5,0.03,0.44'));
		const asked = sheet.proposal.tables[0].findings.find((f) => f.rule === 'B19');
		expect(asked?.open).toBe(true);
		await confirmRun(chemist, {
			sheetId: sheet.id,
			tableKey: 't1',
			conditions: CONDITIONS,
			answers: Object.fromEntries(
				sheet.proposal.tables[0].findings
					.filter((f) => f.open)
					.map((f) => [f.id, { key: f.rule === 'B19' ? 'samples' : f.options[0].key }])
			)
		});
		const kept = await Mapping.findAll({ where: { groupId: group.id } });
		expect(
			kept.some((m) => (m.content as { mapping: { replicates?: string } }).mapping.replicates === 'samples')
		).toBe(true);
		const next = await receive(studyId, 'second.csv', table('5,0.04,0.44'));
		expect(next.proposal.tables[0].findings.some((f) => f.rule === 'B19')).toBe(false);
		expect(next.proposal.tables[0].mapping.replicates).toBe('samples');
	});

	it('a time unit chosen by hand stands on the record with the sentence that was confirmed', async () => {
		const { studyId } = await work();
		const seenInLab = 'Half of A is gone after about 52 min – as seen in the lab?';
		const { made } = await runOf(studyId, 'clean.csv', CLEAN, { seenInLab });
		const { content } = await readRun(chemist, made.id);
		expect(content.conversions?.at(-1)).toContain(`confirmed as seen in the lab: ${seenInLab}`);
	});
});

describe('which temperature counts', () => {
	it('is changed later as a revision with a reason, and only where it is a change', async () => {
		const { studyId } = await work();
		const { made } = await runOf(studyId, 'logged.csv', logged(57.3));
		const ask = { runId: made.id, reason: 'The probe hung in the vapour.' };
		await expect(chooseTemperature(chemist, { ...ask, version: 1, useLog: true })).rejects.toMatchObject({
			code: 'wrong-state'
		});
		await chooseTemperature(chemist, { ...ask, version: 1, useLog: false });
		const { content, revisions } = await readRun(chemist, made.id);
		expect(content.useTemperatureLog).toBe(false);
		expect(revisions[0]).toMatchObject({
			reason: ask.reason,
			differences: [{ field: 'temperature log as the program in fits', from: true, to: false }]
		});
		await expect(chooseTemperature(chemist, { ...ask, version: 1, useLog: true })).rejects.toMatchObject({
			code: 'version-changed'
		});
	});
});

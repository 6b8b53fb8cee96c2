import { beforeEach, describe, expect, it } from 'vitest';
import { makeWork } from './support/work';
import { AuditEvent, Group } from '../../src/lib/server/database/models';
import { changeGroupLimits } from '../../src/lib/server/people/group-limits';
import { readGroup } from '../../src/lib/server/people/members';
import { readSiteSettingsVersion, saveSiteSettings } from '../../src/lib/server/people/site-settings';
import type { Actor } from '../../src/lib/server/policy';
import { readRun } from '../../src/lib/server/runs/read-run';
import { confirmRun } from '../../src/lib/server/sheets/confirm-run';
import { readSheet } from '../../src/lib/server/sheets/read-sheet';
import { receiveSheet } from '../../src/lib/server/sheets/receive-sheet';
import { actorOf, makeActor, makeGroup, makePerson, openTestDatabase } from './support';

openTestDatabase();

let group: Group;
let chemist: Actor;
let lead: Actor;
beforeEach(async () => {
	group = await makeGroup();
	chemist = await makeActor(group);
	lead = await makeActor(group, 'group_lead');
});

const bytes = (text: string) => new TextEncoder().encode(text);
/** A, B and C add up to 100, 96, 92 … % of the charge. */
const SHORT = ['0,0.5,0,0', '1,0.4,0.08,0', '2,0.3,0.16,0', '3,0.2,0.24,0', '4,0.1,0.32,0', '5,0.05,0.36,0'];
const receive = async (head: string, name = 'x.csv', rows = SHORT) => {
	const { studyId } = await makeWork(chemist, group.id, { runs: [] });
	return receiveSheet(chemist, { studyId, fileName: name, bytes: bytes([head, ...rows].join('\n')) });
};
const HEAD = 'Time (h),A (mol/L),B (mol/L),C (mol/L)';
const CONDITIONS = {
	temperature: { value: 50, unit: 'degC' },
	initial: { A: { value: 0.5, unit: 'mol/L' } },
	excess: {}
};
const outside = (findings: { id: string; message: string }[]) =>
	findings.find((f) => f.id.startsWith('B36') && f.id.endsWith('!rows'))?.message ?? '';

describe('the limits of the mass balance', () => {
	it('are those of the site until a group has its own, for reading, page and run alike', async () => {
		const admin = await actorOf(await makePerson({ siteAdmin: true }));
		const before = await readSiteSettingsVersion();
		expect(outside((await receive(HEAD)).proposal.tables[0].findings)).toContain('outside 95–105 %');
		await saveSiteSettings(admin, {
			...before.settings,
			thresholds: { ...before.settings.thresholds, massBalancePercent: 3 },
			version: before.version
		});
		const sheet = await receive(HEAD);
		expect(outside(sheet.proposal.tables[0].findings)).toContain('outside 97–103 % of the charge in 5 rows');
		expect((await readSheet(chemist, sheet.id)).checks).toEqual({ massBalanceLow: 97, massBalanceHigh: 103 });
		await changeGroupLimits(lead, { groupId: group.id, version: 1, massBalancePercent: '15' });
		const wide = await receive(HEAD);
		expect(outside(wide.proposal.tables[0].findings)).toContain('outside 85–115 % of the charge in 2 rows');
		expect((await readSheet(chemist, wide.id)).checks).toEqual({ massBalanceLow: 85, massBalanceHigh: 115 });
		await saveSiteSettings(admin, { ...before.settings, version: before.version + 1 });
	});

	it('of a group are set by its lead, with a record, and go back to the site’s when emptied', async () => {
		await changeGroupLimits(lead, { groupId: group.id, version: 1, massBalancePercent: '2,5' });
		expect(await readGroup(lead, group.id)).toMatchObject({
			massBalancePercent: 2.5,
			siteMassBalancePercent: 5,
			canSetLimits: true,
			version: 2
		});
		const entry = await AuditEvent.findOne({ where: { groupId: group.id, type: 'group.changed' } });
		expect(JSON.parse(entry!.payload)).toEqual({
			from: { massBalancePercent: null },
			to: { massBalancePercent: 2.5 }
		});
		await changeGroupLimits(lead, { groupId: group.id, version: 2, massBalancePercent: '' });
		expect((await Group.findByPk(group.id))!.massBalancePercent).toBeNull();
		await expect(
			changeGroupLimits(lead, { groupId: group.id, version: 2, massBalancePercent: '4' })
		).rejects.toMatchObject({ code: 'version-changed' });
	});

	it.each(['0', '101', 'narrow'])('cannot be %s', (massBalancePercent) => {
		expect(() => changeGroupLimits(lead, { groupId: group.id, version: 1, massBalancePercent })).toThrow();
	});

	it('of a group under GxP need a reason; a chemist and another group cannot set them', async () => {
		await group.update({ gxp: true });
		const ask = { groupId: group.id, version: 1, massBalancePercent: '4' };
		await expect(changeGroupLimits(lead, ask)).rejects.toMatchObject({ code: 'invalid' });
		await changeGroupLimits(lead, { ...ask, reason: 'another method of integration' });
		const stranger = await makeActor(await makeGroup(), 'group_lead');
		expect(() => changeGroupLimits(chemist, ask)).toThrow(expect.objectContaining({ code: 'not-allowed' }));
		expect(() => changeGroupLimits(stranger, ask)).toThrow(expect.objectContaining({ code: 'not-found' }));
	});
});

describe('a time unit chosen by hand', () => {
	const BARE = 'Time,A (mol/L),B (mol/L),C (mol/L)';
	const refusedWith = async (ask: Parameters<typeof confirmRun>[1]) => {
		const caught: unknown = await confirmRun(chemist, ask).catch((e: unknown) => e);
		return caught as { code: string; message: string; options: { data?: { sentence?: string } } };
	};

	it('makes no run until its sentence is confirmed as seen in the lab, through the API too', async () => {
		const sheet = await receive(BARE);
		const [table] = sheet.proposal.tables;
		const unit = table.findings.find((f) => f.rule === 'B4')!;
		const ask = {
			sheetId: sheet.id,
			tableKey: 't1',
			conditions: CONDITIONS,
			answers: { [unit.id]: { key: 'min' } }
		};
		const refusal = await refusedWith(ask);
		expect(refusal).toMatchObject({
			code: 'invalid',
			options: { fields: [{ field: 'conditions.seenInLab' }] }
		});
		const { sentence } = refusal.options.data!;
		expect(sentence).toContain('Half of A is gone after about 2.5 min');
		const wrong = { ...ask, conditions: { ...CONDITIONS, seenInLab: 'Half of A is gone after about 2.5 h' } };
		expect(await refusedWith(wrong)).toMatchObject({ code: 'invalid' });
		const made = await confirmRun(chemist, { ...ask, conditions: { ...CONDITIONS, seenInLab: sentence } });
		const { content } = await readRun(chemist, made.id);
		expect(content.timeUnit).toBe('min');
		expect(content.conversions?.join()).toContain('confirmed as seen in the lab: Half of A is gone');
	});

	it('in place of the one that the sheet states is confirmed as well; the stated one needs nothing', async () => {
		const sheet = await receive(HEAD);
		const mapping = structuredClone(sheet.proposal.tables[0].mapping);
		mapping.columns[0].unit = 'd';
		const ask = { sheetId: sheet.id, tableKey: 't1', mapping, conditions: CONDITIONS };
		expect((await refusedWith(ask)).options.data?.sentence).toContain('2.5 d');
		const made = await confirmRun(chemist, { sheetId: sheet.id, tableKey: 't1', conditions: CONDITIONS });
		expect(made.number).toBe(1);
	});

	it('of a table that was drawn by hand is told from what its own header states', async () => {
		const sheet = await receive(HEAD);
		const { mapping } = sheet.proposal.tables[0];
		const drawn = { ...mapping, table: 'd1', block: { ...mapping.block, lastRow: 6 } };
		const ask = { sheetId: sheet.id, tableKey: 'd1', mapping: drawn, conditions: CONDITIONS };
		const made = await confirmRun(chemist, ask);
		expect(made.revision).toBe(1);
	});
});

describe('a sheet with the times across the top', () => {
	it('becomes a run with the addresses of the sheet, its correction at the true cell', async () => {
		const rows = ['A (mol/L),0.5,0.4,0.3,0.2,0.1', 'B (mol/L),0,0.1,0.2,0.3,0.4', 'C (mol/L),0,0,0,0,0'];
		const sheet = await receive('Time (h),0,1,2,3,4', 'across.csv', rows);
		const [table] = sheet.proposal.tables;
		expect(table.findings.filter((f) => f.open).map((f) => [f.rule, f.cells[0]])).toEqual([['B1', 'A1']]);
		const made = await confirmRun(chemist, {
			sheetId: sheet.id,
			tableKey: 't1',
			conditions: CONDITIONS,
			answers: { [table.findings.find((f) => f.rule === 'B1')!.id]: { key: 'right' } },
			corrections: [
				{ sheet: table.sheet, cell: 'C2', original: '0.4', corrected: '0.41', reason: 'copied wrongly' }
			]
		});
		const { content } = await readRun(chemist, made.id);
		expect(content.timepoints[1]).toMatchObject({
			time: 1,
			values: { A: 0.41, B: 0.1 },
			source: { row: 1, column: 3, cells: { A: 'C2', B: 'C3', C: 'C4' } }
		});
		expect(content.corrections).toMatchObject([{ cell: 'C2', original: '0.4', by: chemist.name }]);
		// The next sheet with these rows begins with what was confirmed.
		const again = await receiveSheet(chemist, {
			studyId: (await readSheet(chemist, sheet.id)).studyId,
			fileName: 'next.csv',
			bytes: bytes(['Time (h),0,1,2,3,5', ...rows].join('\n'))
		});
		expect(again.proposal.tables[0].savedMapping).toBeTruthy();
	});
});

describe('replicates beside each other', () => {
	it('are asked about once for a group: the answer is kept with the mapping', async () => {
		const HEADS = 'Time (h),A inj 1 (mol/L),A inj 2 (mol/L)';
		const rows = [0, 1, 2, 3, 4].map((t) => `${t},${0.5 - t / 10},${0.52 - t / 10}`);
		const sheet = await receive(HEADS, 'one.csv', rows);
		const [asked] = sheet.proposal.tables[0].findings.filter((f) => f.open);
		expect([asked.rule, asked.level]).toEqual(['B13', 'ask']);
		const answers = { [asked.id]: { key: 'injections' } };
		const made = await confirmRun(chemist, {
			sheetId: sheet.id,
			tableKey: 't1',
			conditions: CONDITIONS,
			answers
		});
		const { content } = await readRun(chemist, made.id);
		expect(content.timepoints).toHaveLength(5);
		expect(content.timepoints[0].values.A).toBeCloseTo(0.51, 12);
		const next = await receive(HEADS, 'two.csv', [...rows, '5,0.03,0.05']);
		expect(next.proposal.tables[0].findings.filter((f) => f.open)).toEqual([]);
		// Nothing was said of equal times in rows: those would still be asked.
		expect(next.proposal.tables[0].mapping).toMatchObject({ columnReplicates: 'injections' });
		expect(next.proposal.tables[0].mapping.replicates ?? null).toBeNull();
	});
});

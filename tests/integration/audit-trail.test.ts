import { beforeAll, describe, expect, it } from 'vitest';
import Papa from 'papaparse';
import { appendAudit, GENESIS, SYSTEM } from '../../src/lib/server/audit/append';
import { exportAuditCsv } from '../../src/lib/server/audit/export';
import { auditChoices, auditFilter, listAudit } from '../../src/lib/server/audit/read';
import { checkTrail, verifyTrail } from '../../src/lib/server/audit/verify';
import { write } from '../../src/lib/server/database';
import { AuditEvent, Group, Study } from '../../src/lib/server/database/models';
import type { Actor } from '../../src/lib/server/policy';
import { actorOf, makeActor, makeGroup, makePerson, openTestDatabase, refusal } from './support';

const db = openTestDatabase();

let group: Group;
let other: Group;
let study: Study;
let qa: Actor;
let lead: Actor;
let chemist: Actor;
let foreign: Actor;
let admin: Actor;

const note = (actor: Actor, groupId: string | null, name: string, studyId: string | null = null) =>
	write((tx) =>
		appendAudit(tx, actor, {
			type: 'study.created',
			groupId,
			studyId,
			objectType: 'study',
			objectId: studyId,
			payload: { name, decision: 'hold time at 50 °C' }
		})
	);

beforeAll(async () => {
	group = await makeGroup({ name: 'Kiln Lane 2' });
	other = await makeGroup({ name: 'Ropewalk' });
	qa = await makeActor(group, 'qa_reviewer');
	lead = await makeActor(group, 'group_lead');
	chemist = await makeActor(group, 'chemist');
	foreign = await makeActor(other, 'qa_reviewer');
	admin = await actorOf(await makePerson({ siteAdmin: true }));
	study = await write((tx) =>
		Study.create(
			{
				groupId: group.id,
				name: 'HX-14',
				decision: 'hold time',
				createdById: chemist.userId,
				updatedAt: new Date()
			},
			{ transaction: tx }
		)
	);
	await note(chemist, group.id, 'HX-14', study.id);
	await note(foreign, other.id, 'Secret of Ropewalk');
	await note(lead, group.id, '=HYPERLINK("http://evil.example")');
	await write((tx) =>
		appendAudit(tx, SYSTEM, {
			type: 'member.role-changed',
			groupId: group.id,
			objectType: 'person',
			objectId: chemist.userId,
			payload: { name: 'M. Okafor', from: 'chemist', to: 'qa_reviewer' },
			reason: 'moved to QA'
		})
	);
	await note(admin, null, 'site-wide entry');
});

describe('the audit trail', () => {
	it('shows the own groups, newest first, and nothing of another', async () => {
		const page = await listAudit(qa);
		expect(page.items.map((i) => i.seq)).toEqual([4, 3, 1]);
		expect(page.total).toBe(3);
		expect(JSON.stringify(page)).not.toContain('Ropewalk');
		expect((await listAudit(foreign)).items.map((i) => i.seq)).toEqual([2]);
	});

	it('is refused to chemists and readers', async () => {
		expect((await refusal(() => listAudit(chemist))).code).toBe('not-allowed');
		const reader = await makeActor(group, 'reader');
		expect((await refusal(() => listAudit(reader))).code).toBe('not-allowed');
	});

	it('shows a site admin the entries that belong to no group, and no content of groups', async () => {
		expect((await listAudit(admin)).items.map((i) => i.seq)).toEqual([5]);
	});

	it('gives a token with scope read what its person may read, without the site entries', async () => {
		const both = await makePerson({ siteAdmin: true, group, role: 'qa_reviewer' });
		const items = async (scopes: ['read'] | ['write']) =>
			(await listAudit(await actorOf(both, { scopes }))).items.map((i) => i.seq);
		expect(await items(['read'])).toEqual([4, 3, 1]);
		await expect(items(['write'])).rejects.toMatchObject({ code: 'not-allowed' });
	});

	it('tells each entry in words, with what was before and after', async () => {
		const [changed, , first] = (await listAudit(qa)).items;
		expect(changed).toMatchObject({
			line: 'Role of M. Okafor changed',
			details: [{ label: 'role', from: 'chemist', to: 'qa reviewer' }],
			reason: 'moved to QA',
			groupName: 'Kiln Lane 2'
		});
		expect(first).toMatchObject({ studyName: 'HX-14', printedName: chemist.name, role: 'chemist' });
	});

	it('narrows to study, object, kind, person and days, and cannot be widened by the filter', async () => {
		const seqs = async (filter: object, actor = qa) =>
			(await listAudit(actor, { filter: auditFilter.parse(filter) })).items.map((i) => i.seq);
		const today = new Date().toISOString().slice(0, 10);
		expect(await seqs({ study: study.id })).toEqual([1]);
		expect(await seqs({ object: chemist.userId })).toEqual([4]);
		expect(await seqs({ type: 'member.' })).toEqual([4]);
		expect(await seqs({ objectType: 'study' })).toEqual([3, 1]);
		expect(await seqs({ person: lead.name })).toEqual([3]);
		expect(await seqs({ from: today, to: today })).toEqual([4, 3, 1]);
		expect(await seqs({ to: '2020-01-01' })).toEqual([]);
		expect(await seqs({ group: other.id })).toEqual([]);
		expect(await seqs({ person: '%' })).toEqual([4, 3, 1]);
		expect(await seqs({ study: '', group: '', from: '' })).toEqual([4, 3, 1]);
	});

	it('is paged by number', async () => {
		const first = await listAudit(qa, { limit: 2 });
		const second = await listAudit(qa, { limit: 2, before: first.next! });
		expect(first.items.map((i) => i.seq)).toEqual([4, 3]);
		expect(second).toMatchObject({ next: null, items: [{ seq: 1 }] });
	});

	it('offers only own groups and studies to narrow by', async () => {
		const choices = await auditChoices(qa);
		expect(choices.groups).toEqual([{ id: group.id, name: 'Kiln Lane 2' }]);
		expect(choices.studies).toEqual([{ id: study.id, name: 'HX-14' }]);
	});

	it('goes out as CSV in which no text can act as a formula', async () => {
		const { csv, entries } = await exportAuditCsv(qa, { group: group.id });
		const rows = Papa.parse<Record<string, string>>(csv.replace('\uFEFF', '').trim(), {
			header: true
		}).data;
		expect(entries).toBe(3);
		expect(rows.map((r) => r.entry)).toEqual(['1', '3', '4']);
		for (const row of rows) for (const cell of Object.values(row)) expect(cell).not.toMatch(/^[=+\-@\t\r]/);
		expect(rows[2]['from and to']).toBe('role: chemist to qa reviewer');
		const last = await AuditEvent.findOne({ order: [['seq', 'DESC']] });
		expect(last).toMatchObject({ type: 'audit.exported', userId: qa.userId });
	});
});

describe('a reason of several lines', () => {
	it('goes out as CSV as text too, although it begins like a formula', async () => {
		const lab = await makeGroup();
		const reviewer = await makeActor(lab, 'qa_reviewer');
		await write((tx) =>
			appendAudit(tx, reviewer, {
				type: 'recipe.withdrawn',
				groupId: lab.id,
				objectType: 'recipe',
				payload: { number: 1 },
				reason: '=HYPERLINK("http://evil.example","read this")\nsecond line'
			})
		);
		const { csv } = await exportAuditCsv(reviewer, { group: lab.id });
		const [row] = Papa.parse<Record<string, string>>(csv.replace('\uFEFF', '').trim(), {
			header: true
		}).data;
		expect(row.reason).toMatch(/^'=HYPERLINK/);
	});
});

describe('the database', () => {
	it('refuses to change or remove an entry', async () => {
		const raw = (sql: string) => db.database().sequelize.query(sql);
		for (const sql of [
			"UPDATE audit_events SET reason = 'x' WHERE seq = 1",
			'DELETE FROM audit_events WHERE seq = 1',
			'INSERT OR REPLACE INTO audit_events SELECT * FROM audit_events WHERE seq = 1'
		])
			await expect(raw(sql)).rejects.toMatchObject({
				parent: { message: expect.stringContaining('append-only') as string }
			});
	});
	it('takes no entry whose content has not the form of its kind', async () => {
		const before = await AuditEvent.count();
		await expect(
			write((tx) =>
				appendAudit(tx, qa, {
					type: 'study.created',
					objectType: 'study',
					payload: { name: 'no decision' } as never
				})
			)
		).rejects.toThrow();
		expect(await AuditEvent.count()).toBe(before);
	});
	it('keeps no entry of a change that failed', async () => {
		const before = await AuditEvent.count();
		await expect(
			write(async (tx) => {
				await appendAudit(tx, qa, {
					type: 'person.signed-in',
					objectType: 'person',
					payload: {}
				});
				throw new Error('the change failed');
			})
		).rejects.toThrow('the change failed');
		expect(await AuditEvent.count()).toBe(before);
	});
	it('gives many entries written at once one number each, without a gap', async () => {
		await Promise.all(Array.from({ length: 25 }, (_, i) => note(qa, group.id, `at once ${i}`)));
		expect((await checkTrail()).firstBad).toBeNull();
	});
});

describe('verification', () => {
	it('finds a sound chain sound, is itself on the trail, and is for those who may', async () => {
		const result = await verifyTrail(qa);
		expect(result.firstBad).toBeNull();
		const head = await AuditEvent.findOne({ where: { seq: result.entries } });
		expect(result.lastHash).toBe(head!.hash);
		const last = await AuditEvent.findOne({ order: [['seq', 'DESC']] });
		expect(last).toMatchObject({ type: 'audit.verified', seq: result.entries + 1 });
		expect((await verifyTrail(admin)).firstBad).toBeNull();
		expect((await refusal(() => verifyTrail(chemist))).code).toBe('not-allowed');
	});

	it('starts from a fixed beginning', async () => {
		expect((await AuditEvent.findByPk(1))!.prevHash).toBe(GENESIS);
	});

	/** What somebody with the file and a database tool could do. */
	async function tampered(sql: string, undo: string, work: () => Promise<void>): Promise<void> {
		const { sequelize } = db.database();
		for (const verb of ['update', 'delete'])
			await sequelize.query(`DROP TRIGGER IF EXISTS audit_events_refuse_${verb}`);
		await sequelize.query(sql);
		await work();
		await sequelize.query(undo);
		expect((await checkTrail()).firstBad).toBeNull();
	}

	const columns = [
		['printed_name', 'Somebody Else'],
		['at', '2020-01-01T00:00:00.000Z'],
		['reason', 'another reason'],
		['role', 'reader'],
		['source', 'token: x'],
		['object_type', 'recipe'],
		['type', 'scheme.created'],
		['payload', '{"decision":"hold time at 60 °C","name":"HX-14"}']
	];
	it.each(columns)('names the first entry whose %s was altered', async (column, value) => {
		const before = await AuditEvent.findByPk(3);
		const key = column.replace(/_(\w)/g, (_, c: string) => c.toUpperCase()) as 'reason';
		const old = before!.get(key);
		const back = old === null ? 'NULL' : `'${String(old).replaceAll("'", "''")}'`;
		await tampered(
			`UPDATE audit_events SET ${column} = '${value}' WHERE seq = 3`,
			`UPDATE audit_events SET ${column} = ${back} WHERE seq = 3`,
			async () => {
				const { firstBad, entries } = await checkTrail();
				expect(firstBad).toMatchObject({ seq: 3, why: expect.stringMatching(/changed after/) as string });
				expect(entries).toBe(2);
			}
		);
	});

	it('names the entry after one that was taken out', async () => {
		const row = (await AuditEvent.findByPk(2))!.get({ plain: true });
		const { sequelize } = db.database();
		for (const verb of ['update', 'delete'])
			await sequelize.query(`DROP TRIGGER IF EXISTS audit_events_refuse_${verb}`);
		await sequelize.query('DELETE FROM audit_events WHERE seq = 2');
		expect((await checkTrail()).firstBad).toEqual({
			seq: 3,
			why: 'Entry 2 is missing: entry 3 follows entry 1.'
		});
		await write((tx) => AuditEvent.create(row, { transaction: tx }));
		expect((await checkTrail()).firstBad).toBeNull();
	});

	it('names an entry that was rewritten with a fitting hash of its own, by the one after it', async () => {
		const { entryHash } = await import('../../src/lib/server/audit/append');
		const row = (await AuditEvent.findByPk(2))!.get({ plain: true });
		const forged = entryHash({ ...row, reason: 'forged' });
		await tampered(
			`UPDATE audit_events SET reason = 'forged', hash = '${forged}' WHERE seq = 2`,
			`UPDATE audit_events SET reason = NULL, hash = '${row.hash}' WHERE seq = 2`,
			async () => {
				expect((await checkTrail()).firstBad).toMatchObject({ seq: 3 });
			}
		);
	});

	it('goes beyond one page of entries', async () => {
		await write(async (tx) => {
			for (let i = 0; i < 1100; i++)
				await appendAudit(tx, SYSTEM, { type: 'person.signed-in', objectType: 'person', payload: {} });
		});
		const result = await checkTrail();
		expect(result.firstBad).toBeNull();
		expect(result.entries).toBeGreaterThan(1100);
	});
});

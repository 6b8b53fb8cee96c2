import { beforeAll, describe, expect, it } from 'vitest';
import { AuditEvent, SchemeVersion, type Group } from '../../src/lib/server/database/models';
import type { Actor } from '../../src/lib/server/policy';
import { createScheme } from '../../src/lib/server/studies/create-scheme';
import { createStudy } from '../../src/lib/server/studies/create-study';
import { listStudies } from '../../src/lib/server/studies/list-studies';
import { readScheme } from '../../src/lib/server/studies/read-scheme';
import { readStudy } from '../../src/lib/server/studies/read-study';
import { saveScheme } from '../../src/lib/server/studies/save-scheme';
import { updateStudy } from '../../src/lib/server/studies/update-study';
import type { SchemeContent } from '../../src/lib/schemas/scheme';
import { makeActor, makeGroup, openTestDatabase } from './support';

openTestDatabase();

let group: Group;
let chemist: Actor;
let other: Actor;
beforeAll(async () => {
	group = await makeGroup();
	chemist = await makeActor(group);
	other = await makeActor(await makeGroup());
});

const study = (name = 'HX-14 ring closure') =>
	createStudy(chemist, {
		groupId: group.id,
		name,
		decision: 'hold time at 50 °C',
		criteria: [
			{ species: 'A', relation: 'NMT', limit: 1, unit: '% of charge' },
			{ species: 'C', relation: 'NMT', limit: 3, unit: '% of charge' }
		]
	});

const content = (value: number): SchemeContent => ({
	species: [
		{ id: 'A', name: 'HX-14' },
		{ id: 'B', name: '' }
	],
	steps: [
		{
			id: 's1',
			reactant: 'A',
			products: [{ species: 'B', coefficient: 1 }],
			forward: { kRef: { value, unit: '1/h' } },
			reverse: null
		}
	],
	referenceTemperature: { value: 50, unit: 'degC' }
});

describe('studies', () => {
	it('a new study has a first scheme whose tray holds the species of the criteria', async () => {
		const { id } = await study();
		const view = await readStudy(chemist, id);
		expect(view.schemes.map((s) => s.name)).toEqual(['Scheme 1']);
		expect(view.schemes[0].content.species.map((s) => s.id)).toEqual(['A', 'C']);
		expect(view.criteria).toHaveLength(2);
		expect(view.stations).toMatchObject({ scheme: '2 species, 0 steps', data: 'no sheet yet' });
		expect(view.canWrite).toBe(true);
	});

	it('are listed newest first, a page at a time, with a total counted over all pages', async () => {
		const own = await makeGroup();
		const actor = await makeActor(own);
		for (let i = 1; i <= 5; i++)
			await createStudy(actor, {
				groupId: own.id,
				name: `Study number ${i}`,
				decision: 'when to quench',
				criteria: []
			});
		const first = await listStudies(actor, { groupId: own.id, limit: 2 });
		expect(first.items.map((s) => s.name)).toEqual(['Study number 5', 'Study number 4']);
		expect(first.total).toBe(5);
		const second = await listStudies(actor, { groupId: own.id, limit: 2, after: first.next! });
		expect(second.items.map((s) => s.name)).toEqual(['Study number 3', 'Study number 2']);
		const third = await listStudies(actor, { groupId: own.id, limit: 2, after: second.next! });
		expect(third.items).toHaveLength(1);
		expect(third.next).toBeNull();
		const found = await listStudies(actor, { groupId: own.id, filter: 'NUMBER 3' });
		expect(found.items.map((s) => s.name)).toEqual(['Study number 3']);
		expect((await listStudies(actor, { groupId: own.id, filter: '100%' })).total).toBe(0);
	});

	it('a change of the criteria is kept with what stood there before', async () => {
		const { id } = await study('Criteria to be changed');
		const saved = await updateStudy(chemist, { studyId: id, version: 1, criteria: [] });
		expect(saved.version).toBe(2);
		const entry = await AuditEvent.findOne({ where: { objectId: id, type: 'study.changed' } });
		expect(JSON.parse(entry!.payload)).toMatchObject({ changes: [{ field: 'criteria', to: [] }] });
		await expect(updateStudy(chemist, { studyId: id, version: 1, name: 'Too late' })).rejects.toMatchObject({
			code: 'version-changed',
			options: { data: { version: 2 } }
		});
	});

	it('another group learns nothing of a study, and a QA reviewer cannot change it', async () => {
		const { id, schemeId } = await study('Not yours');
		await expect(readStudy(other, id)).rejects.toMatchObject({ code: 'not-found' });
		await expect(readScheme(other, schemeId)).rejects.toMatchObject({ code: 'not-found' });
		await expect(readStudy(chemist, 'no-id')).rejects.toMatchObject({ code: 'not-found' });
		const qa = await makeActor(group, 'qa_reviewer');
		expect((await readStudy(qa, id)).canWrite).toBe(false);
		await expect(updateStudy(qa, { studyId: id, version: 1, name: 'New name' })).rejects.toMatchObject({
			code: 'not-allowed'
		});
	});
});

describe('schemes', () => {
	it('every save makes a version, and the same content again makes none', async () => {
		const { id } = await study('Versions');
		const made = await createScheme(chemist, { studyId: id, name: 'Reversible', content: content(0.8) });
		const saved = await saveScheme(chemist, { schemeId: made.id, version: 1, content: content(0.9) });
		expect(saved).toMatchObject({ version: 2, number: 2 });
		const same = await saveScheme(chemist, { schemeId: made.id, version: 2, content: content(0.9) });
		expect(same).toMatchObject({ version: 2, number: 2, versionId: saved.versionId });
		expect(await SchemeVersion.count({ where: { schemeId: made.id } })).toBe(2);
		const first = await readScheme(chemist, made.id, { number: 1 });
		expect(first.content.steps[0].forward.kRef.value).toBe(0.8);
	});

	it('of two people who save at the same time one is told what the other saved, and nothing is lost', async () => {
		const { id } = await study('Conflict');
		const made = await createScheme(chemist, { studyId: id, name: 'Shared', content: content(1) });
		const colleague = await makeActor(group, 'group_lead');
		const outcomes = await Promise.allSettled([
			saveScheme(chemist, { schemeId: made.id, version: 1, content: content(2) }),
			saveScheme(colleague, { schemeId: made.id, version: 1, content: content(3) })
		]);
		expect(outcomes.map((o) => o.status).sort()).toEqual(['fulfilled', 'rejected']);
		const refused = outcomes.find((o) => o.status === 'rejected') as PromiseRejectedResult;
		expect(refused.reason).toMatchObject({ code: 'version-changed', options: { data: { version: 2 } } });
		expect(await SchemeVersion.count({ where: { schemeId: made.id } })).toBe(2);
	});

	it('the audit trail says which species and steps a version changed', async () => {
		const { id } = await study('Trail');
		const made = await createScheme(chemist, { studyId: id, name: 'Trail', content: content(1) });
		await saveScheme(chemist, { schemeId: made.id, version: 1, content: content(2) });
		const entry = await AuditEvent.findOne({
			where: { objectId: made.id, type: 'scheme.version-saved', objectVersion: 2 }
		});
		expect(JSON.parse(entry!.payload)).toMatchObject({ number: 2, summary: 'step s1 changed' });
	});
});

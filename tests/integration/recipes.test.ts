import { randomUUID } from 'node:crypto';
import { beforeAll, describe, expect, it } from 'vitest';
import {
	AuditEvent,
	Fit,
	MailOutbox,
	Membership,
	RecipeVersion,
	Signature,
	User,
	type Group
} from '../../src/lib/server/database/models';
import { write } from '../../src/lib/server/database';
import type { AppError } from '../../src/lib/server/errors';
import type { Actor } from '../../src/lib/server/policy';
import { acknowledgeCaution } from '../../src/lib/server/recipes/acknowledge-caution';
import { commentOnRecipe } from '../../src/lib/server/recipes/comment-on-recipe';
import { createRecipe } from '../../src/lib/server/recipes/create-recipe';
import { listRecipes } from '../../src/lib/server/recipes/list-recipes';
import { readRecipe, type RecipeView } from '../../src/lib/server/recipes/read-recipe';
import { listShared, markSharedRead, readShared } from '../../src/lib/server/recipes/read-shared';
import { returnRecipe } from '../../src/lib/server/recipes/return-recipe';
import { saveRecipe } from '../../src/lib/server/recipes/save-recipe';
import { endShare, shareRecipe } from '../../src/lib/server/recipes/share-recipe';
import { startNewVersion } from '../../src/lib/server/recipes/start-new-version';
import { submitRecipe } from '../../src/lib/server/recipes/submit-recipe';
import { validateRecipe } from '../../src/lib/server/recipes/validate-recipe';
import { verifyRecipe } from '../../src/lib/server/recipes/verify-recipe';
import { withdrawRecipe } from '../../src/lib/server/recipes/withdraw-recipe';
import type { RecipeContent } from '../../src/lib/schemas/recipe';
import { actorOf, makeGroup, makePerson, openTestDatabase } from './support';
import { prepareStudy, reviseRun, type Prepared } from './recipe-support';

openTestDatabase();

const PASSWORD = 'amber glass and verdigris';
let group: Group;
let pilot: Group;
let chemist: Actor;
let lead: Actor;
let qa: Actor;
let reader: Actor;
let outsider: Actor;
let prepared: Prepared;

beforeAll(async () => {
	[group, pilot] = [await makeGroup({ name: 'Route group' }), await makeGroup({ name: 'Pilot hall' })];
	const person = async (of: Group, role: 'chemist' | 'group_lead' | 'qa_reviewer' | 'reader') =>
		actorOf(await makePerson({ group: of, role, password: PASSWORD }));
	chemist = await person(group, 'chemist');
	lead = await person(group, 'group_lead');
	qa = await person(group, 'qa_reviewer');
	reader = await person(pilot, 'reader');
	outsider = await person(await makeGroup(), 'group_lead');
	prepared = await prepareStudy(chemist, group.id);
});

const refusal = async (work: Promise<unknown>): Promise<{ code: string; message: string }> => {
	try {
		await work;
	} catch (caught) {
		const { code, message, name } = caught as AppError;
		return { code: code ?? name, message };
	}
	throw new Error('It was not refused.');
};

const seen = (view: RecipeView) => ({
	recipeId: view.recipe.id,
	number: view.shown.number,
	version: view.shown.version,
	contentHash: view.shown.contentHash,
	password: PASSWORD
});

async function draft(change: Partial<RecipeContent> = {}, of: Prepared = prepared): Promise<RecipeView> {
	const made = await createRecipe(chemist, {
		studyId: of.studyId,
		fitId: of.fitId,
		title: 'HX-14 ring closure'
	});
	const view = await readRecipe(chemist, made.id);
	await saveRecipe(chemist, {
		recipeId: made.id,
		number: 1,
		version: 1,
		content: { ...view.shown.content, confirmationRunId: of.unusedRunId, ...change }
	});
	return readRecipe(chemist, made.id);
}
async function inReview(change: Partial<RecipeContent> = {}, of?: Prepared): Promise<RecipeView> {
	const view = await draft(change, of);
	await submitRecipe(chemist, seen(view));
	return readRecipe(lead, view.recipe.id);
}
async function validated(): Promise<RecipeView> {
	const view = await inReview();
	await validateRecipe(lead, seen(view));
	return readRecipe(lead, view.recipe.id);
}

describe('the draft of a recipe', () => {
	it('is refused on a fit whose constants are local to its runs', async () => {
		const fit = (await Fit.findByPk(prepared.fitId))!;
		const [first, ...rest] = fit.report.parameters;
		const local = {
			...first,
			id: `r1.${first.id.replace('.kRef', '.k')}`,
			local: { run: 'r1', of: first.id }
		};
		const other = await Fit.create({
			...fit.get({ plain: true }),
			id: randomUUID(),
			number: 9000,
			report: { ...fit.report, parameters: [local, ...rest] }
		});
		const asked = { studyId: prepared.studyId, fitId: other.id, title: 'HX-14' };
		expect(await refusal(createRecipe(chemist, asked))).toMatchObject({
			code: 'invalid',
			message: expect.stringContaining('no basis for a recipe') as string
		});
	});

	it('says what the fit and the study say, and leaves the rest blank', async () => {
		const made = await createRecipe(chemist, {
			studyId: prepared.studyId,
			fitId: prepared.fitId,
			title: 'HX-14'
		});
		const { shown, fit } = await readRecipe(chemist, made.id);
		expect(fit.number).toBe(1);
		expect(shown.content.basis).toMatchObject({
			fitNumber: 1,
			schemeNumber: 2,
			studiedTemperatureC: [50, 50]
		});
		expect(shown.content.setPoints.map((s) => [s.parameter, s.value, s.unit])).toEqual([
			['Hold temperature', 50, '°C'],
			['Charge of A', 0.5, 'mol/L']
		]);
		expect(shown.charges.limiting?.amountMol).toBeCloseTo(5, 10);
		expect(shown.charges.limiting?.massKg).toBeCloseTo(1.071, 10);
		expect(shown.cautions.some((c) => c.code === 'heat-not-assessed')).toBe(true);
		expect(shown.content.heat.reactionEnthalpyKJPerMol).toBeNull();
	});

	it('is not overwritten by somebody who read an older state', async () => {
		const view = await draft();
		const save = {
			recipeId: view.recipe.id,
			number: 1,
			content: { ...view.shown.content, other: 'Stir at 200 1/min' }
		};
		expect((await refusal(saveRecipe(chemist, { ...save, version: 1 }))).code).toBe('version-changed');
		await saveRecipe(chemist, { ...save, version: view.shown.version });
		expect((await readRecipe(chemist, view.recipe.id)).shown.content.other).toBe('Stir at 200 1/min');
	});

	it('keeps its basis whatever is sent for it', async () => {
		const view = await draft();
		const forged = { ...view.shown.content, basis: { ...view.shown.content.basis, fitNumber: 99 } };
		await saveRecipe(chemist, {
			recipeId: view.recipe.id,
			number: 1,
			version: view.shown.version,
			content: forged
		});
		expect((await readRecipe(chemist, view.recipe.id)).shown.content.basis.fitNumber).toBe(1);
	});

	it('can be neither validated nor shared', async () => {
		const view = await draft();
		expect((await refusal(validateRecipe(lead, seen(view)))).code).toBe('wrong-state');
		expect(
			(await refusal(shareRecipe(lead, { recipeId: view.recipe.id, number: 1, groupId: pilot.id }))).code
		).toBe('wrong-state');
	});

	it('with a finding that stops cannot be submitted without a justification that prints', async () => {
		const doubtful = await prepareStudy(chemist, group.id, (report) => ({
			...report,
			findings: [{ code: 'lack-of-fit', level: 'stop', message: 'Lack of fit: F 45.4, critical 3.2.' }]
		}));
		const view = await draft({}, doubtful);
		const refused = await refusal(submitRecipe(chemist, seen(view)));
		expect(refused.message).toMatch(/finding that stops/);
		const justification = 'The first sample is left out because the charge took ten minutes.';
		const explained = await inReview({ justification }, doubtful);
		expect(explained.shown.content.justification).toBe(justification);
		expect(explained.shown.state).toBe('in review');
	});
});

describe('review and signature', () => {
	it('records printed name, meaning, time and the hash of the exact version', async () => {
		const view = await validated();
		expect(view.shown.state).toBe('validated');
		expect(view.shown.signatures.map((s) => [s.meaning, s.printedName, s.contentHash])).toEqual([
			['Authored', chemist.name, view.shown.contentHash],
			['Validated', lead.name, view.shown.contentHash]
		]);
		const confirmation = view.shown.signatures[1].confirmation;
		expect(confirmation).toMatchObject({ runNumber: 2, total: 33, level: 0.95 });
		expect(confirmation!.inside).toBeGreaterThanOrEqual(28);
		expect(await AuditEvent.count({ where: { type: 'recipe.signed', objectId: view.recipe.id } })).toBe(2);
	});

	it('refuses the author, also one who is a group lead', async () => {
		const view = await draft();
		const content = { ...view.shown.content, other: 'A line of the lead.' };
		await saveRecipe(lead, { recipeId: view.recipe.id, number: 1, version: view.shown.version, content });
		const saved = await readRecipe(chemist, view.recipe.id);
		await submitRecipe(chemist, seen(saved));
		const review = await readRecipe(lead, view.recipe.id);
		expect(review.may.validate).toBe(false);
		expect((await refusal(validateRecipe(lead, seen(review)))).code).toBe('not-allowed');
		expect((await refusal(validateRecipe(chemist, seen(review)))).code).toBe('not-allowed');
	});

	it('refuses a token, whatever its scopes', async () => {
		const view = await inReview();
		const token = await actorOf(await User.findByPk(lead.userId, { rejectOnEmpty: true }), {
			scopes: ['read', 'write', 'fit', 'export'],
			signedInAt: null
		});
		expect((await refusal(validateRecipe(token, seen(view)))).code).toBe('not-allowed');
		expect((await refusal(verifyRecipe(token, seen(view)))).code).toBe('not-allowed');
	});

	it('refuses a signature on a version that somebody changed meanwhile', async () => {
		const view = await inReview();
		await startNewVersion(chemist, { recipeId: view.recipe.id, reason: 'Longer heat-up at scale' });
		expect((await refusal(validateRecipe(lead, seen(view)))).code).toBe('version-changed');
		const other = await inReview();
		expect((await refusal(validateRecipe(lead, { ...seen(other), contentHash: 'f'.repeat(64) }))).code).toBe(
			'version-changed'
		);
		expect(await Signature.count({ where: { recipeVersionId: other.shown.id, meaning: 'Validated' } })).toBe(
			0
		);
	});

	it('needs a run that the fit has not seen, and words where it was predicted badly', async () => {
		const none = await inReview({ confirmationRunId: null });
		expect((await refusal(validateRecipe(lead, seen(none)))).message).toMatch(/No confirmation run/);
		const used = await inReview({ confirmationRunId: prepared.usedRunId });
		expect((await refusal(validateRecipe(lead, seen(used)))).message).toMatch(/was used in fit 1/);
		const stray = await inReview({ confirmationRunId: prepared.strayRunId });
		expect((await refusal(validateRecipe(lead, seen(stray)))).message).toMatch(/of 33 points lie inside/);
		const comment = 'Assay of A in this run was read with the wrong standard; see the deviation.';
		const done = await validateRecipe(lead, { ...seen(stray), comment });
		expect(done.confirmation.needsComment).toBe(true);
	});

	it('is locked after three wrong passwords, logged on the record, and the comment is for the page to keep', async () => {
		const careless = await actorOf(await makePerson({ group, role: 'group_lead', password: PASSWORD }));
		const view = await inReview();
		const attempts = [];
		for (let i = 0; i < 3; i++)
			attempts.push(await refusal(validateRecipe(careless, { ...seen(view), password: 'wrong' })));
		expect(attempts.map((a) => a.code)).toEqual(['invalid', 'invalid', 'locked']);
		expect((await refusal(validateRecipe(careless, seen(view)))).code).toBe('locked');
		expect(
			await AuditEvent.count({ where: { type: 'recipe.signing-failed', objectId: view.recipe.id } })
		).toBe(4);
		expect((await readRecipe(lead, view.recipe.id)).shown.state).toBe('in review');
	});

	it('keeps the printed name of the day when a person is renamed or leaves the group', async () => {
		const view = await validated();
		const before = lead.name;
		await write((tx) =>
			User.update({ name: 'Another Name' }, { where: { id: lead.userId }, transaction: tx })
		);
		await write((tx) => Membership.destroy({ where: { userId: lead.userId }, transaction: tx }));
		const later = await readRecipe(qa, view.recipe.id);
		expect(later.shown.signatures[1].printedName).toBe(before);
		await write((tx) => User.update({ name: before }, { where: { id: lead.userId }, transaction: tx }));
		await write((tx) =>
			Membership.create({ userId: lead.userId, groupId: group.id, role: 'group_lead' }, { transaction: tx })
		);
	});

	it('lets QA sign "Verified" after a group lead, once, and nobody else', async () => {
		const waiting = await inReview();
		expect((await refusal(verifyRecipe(qa, seen(waiting)))).code).toBe('wrong-state');
		const view = await validated();
		expect((await refusal(verifyRecipe(lead, seen(view)))).code).toBe('not-allowed');
		await verifyRecipe(qa, seen(view));
		expect((await refusal(verifyRecipe(qa, seen(view)))).code).toBe('conflict');
		expect((await readRecipe(qa, view.recipe.id)).shown.signatures.map((s) => s.meaning)).toEqual([
			'Authored',
			'Validated',
			'Verified'
		]);
	});

	it('does not let a lead who validated a version verify it after a change of role', async () => {
		const view = await validated();
		const own = { where: { userId: lead.userId, groupId: group.id } };
		await write((tx) => Membership.update({ role: 'qa_reviewer' }, { ...own, transaction: tx }));
		const now = await actorOf(await User.findByPk(lead.userId, { rejectOnEmpty: true }));
		expect((await readRecipe(now, view.recipe.id)).may.verify).toBe(false);
		const refused = await refusal(verifyRecipe(now, seen(view)));
		expect(refused.message).toMatch(/You signed this version “Validated”/);
		await write((tx) => Membership.update({ role: 'group_lead' }, { ...own, transaction: tx }));
	});

	it('refuses to change a signature or take it away, in the database itself', async () => {
		const view = await validated();
		const { id } = view.shown.signatures[1];
		const change = write((tx) => Signature.update({ printedName: 'X' }, { where: { id }, transaction: tx }));
		await expect(change).rejects.toThrow();
		await expect(write((tx) => Signature.destroy({ where: { id }, transaction: tx }))).rejects.toThrow();
		expect((await Signature.findByPk(id))?.printedName).toBe(lead.name);
	});

	it('refuses to change the content of a version that has left its draft, in the database itself', async () => {
		const view = await inReview();
		const { id } = view.shown;
		const content = { ...view.shown.content, other: 'slipped in' };
		const change = write((tx) => RecipeVersion.update({ content }, { where: { id }, transaction: tx }));
		await expect(change).rejects.toThrow();
		await expect(
			write((tx) => RecipeVersion.update({ state: 'draft' }, { where: { id }, transaction: tx }))
		).rejects.toThrow();
		await expect(write((tx) => RecipeVersion.destroy({ where: { id }, transaction: tx }))).rejects.toThrow();
		expect((await RecipeVersion.findByPk(id))?.content).not.toHaveProperty('other', 'slipped in');
	});

	it('finds content that was changed behind the service', async () => {
		const view = await inReview();
		const content = { ...view.shown.content, other: 'slipped in' };
		await RecipeVersion.sequelize!.query('DROP TRIGGER recipe_versions_refuse_change');
		await write((tx) => RecipeVersion.update({ content }, { where: { id: view.shown.id }, transaction: tx }));
		expect((await refusal(validateRecipe(lead, seen(view)))).code).toBe('version-changed');
	});
});

describe('return, comment, next version', () => {
	it('goes back to the author with a comment, and only a lead can do that', async () => {
		const view = await inReview();
		expect((await refusal(returnRecipe(chemist, { ...seen(view), comment: 'Not yet' }))).code).toBe(
			'not-allowed'
		);
		await commentOnRecipe(qa, {
			recipeId: view.recipe.id,
			number: 1,
			text: 'Which lot of standard?',
			anchor: 'setPoints/temperature'
		});
		await returnRecipe(lead, { ...seen(view), comment: 'Say where the sample is taken.' });
		const back = await readRecipe(chemist, view.recipe.id);
		expect(back.shown.state).toBe('returned');
		expect(back.comments.map((c) => [c.text, c.anchor])).toEqual([
			['Which lot of standard?', 'setPoints/temperature'],
			['Say where the sample is taken.', null]
		]);
	});

	it('begins a new draft with a reason; a dot is none; signatures do not carry over', async () => {
		const view = await validated();
		expect((await refusal(startNewVersion(chemist, { recipeId: view.recipe.id, reason: '.' }))).code).toBe(
			'ZodError'
		);
		expect(
			(await refusal(startNewVersion(chemist, { recipeId: view.recipe.id, reason: 'a.b.c' }))).code
		).toBe('ZodError');
		await startNewVersion(chemist, { recipeId: view.recipe.id, reason: 'Slower cooling in the plant' });
		const next = await readRecipe(chemist, view.recipe.id);
		expect([next.shown.number, next.shown.state, next.shown.signatures.length]).toEqual([2, 'draft', 0]);
		expect(next.difference).toEqual({ with: 1, places: [] });
		expect(
			(await refusal(startNewVersion(chemist, { recipeId: view.recipe.id, reason: 'once more please' }))).code
		).toBe('wrong-state');
		expect((await readRecipe(chemist, view.recipe.id, 1)).shown.signatures).toHaveLength(2);
	});

	it('supersedes the version in force when the next one is validated, and tells who holds it', async () => {
		const view = await validated();
		const { shareId } = await shareRecipe(lead, { recipeId: view.recipe.id, number: 1, groupId: pilot.id });
		await startNewVersion(chemist, { recipeId: view.recipe.id, reason: 'Slower cooling in the plant' });
		const next = await readRecipe(chemist, view.recipe.id);
		await submitRecipe(chemist, seen(next));
		await validateRecipe(lead, seen(await readRecipe(lead, view.recipe.id)));
		expect((await readRecipe(lead, view.recipe.id, 1)).shown.state).toBe('superseded');
		expect((await readShared(reader, shareId)).shown.state).toBe('superseded');
		const mails = await MailOutbox.findAll({ where: { to: reader.email } });
		expect(mails.filter((m) => m.subject.includes('newer version') && m.text.includes(shareId))).toHaveLength(
			1
		);
	});

	it('is marked when it rests on data that were revised since', async () => {
		const own = await prepareStudy(chemist, group.id);
		const view = await draft({}, own);
		expect(view.shown.supersededData).toEqual([]);
		await reviseRun(chemist, own.usedRunId);
		expect((await readRecipe(chemist, view.recipe.id)).shown.supersededData).toEqual([
			{ runNumber: 1, used: 1, current: 2 }
		]);
		const { items } = await listRecipes(chemist, { groupId: group.id });
		expect(items.find((i) => i.id === view.recipe.id)?.supersededData).toBe(true);
	});
});

describe('sharing and withdrawal', () => {
	it('shows exactly the shared version to the other group, read-only, and nothing to a third', async () => {
		const view = await validated();
		const { shareId } = await shareRecipe(lead, { recipeId: view.recipe.id, number: 1, groupId: pilot.id });
		const shared = await readShared(reader, shareId);
		expect(shared.shown.contentHash).toBe(view.shown.contentHash);
		expect((await listShared(reader, { groupId: pilot.id })).items[0]).toMatchObject({
			shareId,
			number: 1,
			fromGroup: 'Route group'
		});
		expect((await refusal(readShared(outsider, shareId))).code).toBe('not-found');
		expect((await refusal(readRecipe(reader, view.recipe.id))).code).toBe('not-found');
		expect((await refusal(readRecipe(outsider, view.recipe.id))).code).toBe('not-found');
		expect(
			(
				await refusal(
					saveRecipe(reader, { recipeId: view.recipe.id, number: 1, version: 1, content: view.shown.content })
				)
			).code
		).toBe('not-found');
		expect(
			(await refusal(shareRecipe(chemist, { recipeId: view.recipe.id, number: 1, groupId: pilot.id }))).code
		).toBe('not-allowed');
		await startNewVersion(chemist, { recipeId: view.recipe.id, reason: 'Other solvent is tried' });
		expect((await readShared(reader, shareId)).shown.number).toBe(1);
	});

	it('mails a link and no chemistry', async () => {
		const mails = await MailOutbox.findAll({ where: { to: reader.email } });
		expect(mails.length).toBeGreaterThan(0);
		for (const mail of await MailOutbox.findAll())
			expect(`${mail.subject} ${mail.text}`).not.toMatch(/HX-14|ring closure|lactone|mol\/L|°C/);
		expect(mails.some((m) => /http:\/\/localhost:4300\/shared\//.test(m.text))).toBe(true);
	});

	it('shows the owner who read it, and ends when the lead ends it', async () => {
		const view = await validated();
		const { shareId } = await shareRecipe(lead, { recipeId: view.recipe.id, number: 1, groupId: pilot.id });
		await markSharedRead(reader, shareId);
		await markSharedRead(reader, shareId);
		const holder = (await readRecipe(lead, view.recipe.id)).holders[0];
		expect(holder).toMatchObject({ groupName: 'Pilot hall', number: 1 });
		expect(holder.readBy.map((r) => r.printedName)).toEqual([reader.name]);
		expect(
			(await refusal(shareRecipe(lead, { recipeId: view.recipe.id, number: 1, groupId: pilot.id }))).code
		).toBe('conflict');
		await endShare(lead, { recipeId: view.recipe.id, shareId });
		expect((await refusal(readShared(reader, shareId))).code).toBe('not-found');
	});

	it('records who read a caution, and lets that fall away when the inputs change', async () => {
		const view = await draft();
		const [caution] = view.shown.cautions;
		await acknowledgeCaution(chemist, { recipeId: view.recipe.id, number: 1, cautionKey: caution.key });
		const read = await readRecipe(chemist, view.recipe.id);
		expect(read.shown.cautions[0].readBy.map((r) => r.printedName)).toEqual([chemist.name]);
		const heat = { ...read.shown.content.heat, mttC: 101 };
		await saveRecipe(chemist, {
			recipeId: view.recipe.id,
			number: 1,
			version: read.shown.version,
			content: { ...read.shown.content, heat }
		});
		const changed = await readRecipe(chemist, view.recipe.id);
		expect(changed.shown.cautions.find((c) => c.code === caution.code)?.readBy).toEqual([]);
		expect(
			(
				await refusal(
					acknowledgeCaution(chemist, { recipeId: view.recipe.id, number: 1, cautionKey: caution.key })
				)
			).code
		).toBe('conflict');
	});

	it('stays readable under its reason when it is withdrawn, and holders are told', async () => {
		const view = await validated();
		const { shareId } = await shareRecipe(lead, { recipeId: view.recipe.id, number: 1, groupId: pilot.id });
		expect((await refusal(withdrawRecipe(chemist, { ...seen(view), reason: 'Wrong solvent' }))).code).toBe(
			'not-allowed'
		);
		expect((await refusal(withdrawRecipe(lead, { ...seen(view), reason: '...' }))).code).toBe('ZodError');
		await withdrawRecipe(lead, { ...seen(view), reason: 'The standard of C was wrong.' });
		const shared = await readShared(reader, shareId);
		expect(shared.shown.state).toBe('withdrawn');
		expect(shared.withdrawn).toMatchObject({ reason: 'The standard of C was wrong.', by: lead.name });
		const mails = await MailOutbox.findAll({ where: { to: reader.email } });
		expect(mails.some((m) => m.subject.includes('withdrawn') && m.text.includes(shareId))).toBe(true);
		expect(
			(await refusal(startNewVersion(chemist, { recipeId: view.recipe.id, reason: 'Begin once more' }))).code
		).toBe('wrong-state');
	});
});

import { beforeAll, describe, expect, it } from 'vitest';
import type { RecipeContent } from '../../src/lib/schemas/recipe';
import type { Group } from '../../src/lib/server/database/models';
import type { Actor } from '../../src/lib/server/policy';
import { createRecipe } from '../../src/lib/server/recipes/create-recipe';
import { readRecipe, type RecipeView } from '../../src/lib/server/recipes/read-recipe';
import { saveRecipe } from '../../src/lib/server/recipes/save-recipe';
import { startNewVersion } from '../../src/lib/server/recipes/start-new-version';
import { submitRecipe } from '../../src/lib/server/recipes/submit-recipe';
import { validateRecipe } from '../../src/lib/server/recipes/validate-recipe';
import type { RunContent } from '../../src/lib/schemas/run';
import { addRun } from '../../src/lib/server/runs/create-run';
import { findStudy } from '../../src/lib/server/studies/find';
import { write } from '../../src/lib/server/database';
import { content, prepareStudy, type Prepared } from './recipe-support';
import { actorOf, makeGroup, makePerson, openTestDatabase, refusal } from './support';

openTestDatabase();

const PASSWORD = 'amber glass and verdigris';
let group: Group;
let chemist: Actor;
let lead: Actor;
let otherLead: Actor;
let prepared: Prepared;

beforeAll(async () => {
	group = await makeGroup();
	const person = async (role: 'chemist' | 'group_lead') =>
		actorOf(await makePerson({ group, role, password: PASSWORD }));
	[chemist, lead, otherLead] = [
		await person('chemist'),
		await person('group_lead'),
		await person('group_lead')
	];
	prepared = await prepareStudy(chemist, group.id);
});

const seen = (view: RecipeView) => ({
	recipeId: view.recipe.id,
	number: view.shown.number,
	version: view.shown.version,
	contentHash: view.shown.contentHash,
	password: PASSWORD
});

async function change(actor: Actor, id: string, part: Partial<RecipeContent>): Promise<RecipeView> {
	const view = await readRecipe(actor, id);
	const { recipeId, number, version } = seen(view);
	await saveRecipe(actor, { recipeId, number, version, content: { ...view.shown.content, ...part } });
	return readRecipe(actor, id);
}

const submit = async (actor: Actor, id: string) => {
	await submitRecipe(actor, seen(await readRecipe(actor, id)));
	return readRecipe(actor, id);
};

async function begun(actor: Actor, confirmationRunId = prepared.unusedRunId): Promise<string> {
	const { studyId, fitId } = prepared;
	const { id } = await createRecipe(actor, { studyId, fitId, title: 'HX-14 ring closure' });
	await change(actor, id, { confirmationRunId });
	return id;
}

describe('nobody signs off own work', () => {
	it('not even where a colleague begins the next version with the same content', async () => {
		const id = await begun(lead);
		await submit(lead, id);
		await startNewVersion(chemist, { recipeId: id, reason: 'Taken back to hand it in again' });
		const view = await submit(chemist, id);
		expect((await readRecipe(lead, id)).may.validate).toBe(false);
		expect((await refusal(() => validateRecipe(lead, seen(view)))).code).toBe('not-allowed');
		await validateRecipe(otherLead, seen(view));
	});

	it('but what another lead has validated counts as reviewed: the next version stands on it', async () => {
		const id = await begun(lead);
		await validateRecipe(otherLead, seen(await submit(lead, id)));
		await startNewVersion(chemist, { recipeId: id, reason: 'Stirring at scale' });
		await change(chemist, id, { other: 'Stir at 200 1/min' });
		await validateRecipe(lead, seen(await submit(chemist, id)));
		expect((await readRecipe(lead, id)).shown.state).toBe('validated');
	});
});

describe('the confirmation run', () => {
	const runOf = (body: RunContent) =>
		write(async (tx) => {
			const study = await findStudy(chemist, prepared.studyId, 'run.write', tx);
			const common = { name: '', sheetId: null, tableKey: null, answers: {} };
			return (await addRun(tx, chemist, study, { ...common, content: body })).run.id;
		});

	it('is not a second reading of the values that the fit has seen', async () => {
		const copy = await runOf({ ...content(), timeZero: 'end of charging, read a second time' });
		const view = await submit(chemist, await begun(chemist, copy));
		const refused = await refusal(() => validateRecipe(lead, seen(view)));
		expect(refused.message).toMatch(/times and values of a run that fit 1 used/);
	});

	it('of which nothing lies inside the band needs words, however few points it has', async () => {
		const stray = content(0.09);
		const one = {
			...stray,
			timepoints: [{ ...stray.timepoints[3], values: { A: stray.timepoints[3].values.A } }]
		};
		const view = await submit(chemist, await begun(chemist, await runOf(one)));
		expect(view.confirmation.chosen).toMatchObject({ inside: 0, total: 1 });
		const refused = await refusal(() => validateRecipe(lead, seen(view)));
		expect(refused.message).toMatch(/Only 0 of 1 points/);
	});
});

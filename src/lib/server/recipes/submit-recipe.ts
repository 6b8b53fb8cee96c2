import { chargesAt } from '$lib/recipe/charges';
import { mayMove } from '$lib/recipe/states';
import { recipeContent, type RecipeContent } from '$lib/schemas/recipe';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import { Fit, type Recipe } from '../database/models';
import { AppError, type FieldProblem } from '../errors';
import type { Actor } from '../policy';
import { about } from './audit';
import { askPassword } from './ask-password';
import { findRecipe, findVersion, moveVersion, newer, wrongState } from './find';
import { link, tellGroup } from './mail';
import { concentrationOf } from '$lib/recipe/set-points';
import { requireSameVersion, writeSignature } from './sign';

export interface SubmitInput {
	recipeId: string;
	number: number;
	version: number;
	contentHash?: string;
	/** Given on the page: the version is then signed "Authored". A token submits without signing. */
	password?: string;
	comment?: string;
}

/** Whether the fit says something that stops: such a recipe needs words that print on it. */
const stops = (fit: Fit): boolean =>
	fit.report.status !== 'converged' || fit.report.findings.some((f) => f.level === 'stop');

/** What has to be there before anybody is asked to review. */
export function submitProblems(content: RecipeContent, fit: Fit): FieldProblem[] {
	const problems: FieldProblem[] = [];
	const say = (field: string, message: string) => problems.push({ field, message });
	if (content.procedure.length === 0) say('procedure', 'The procedure has no operation yet.');
	if (content.setPoints.length === 0) say('setPoints', 'There is no set-point yet.');
	for (const problem of chargesAt(content.charges, content.scale, concentrationOf(content)).problems)
		say('charges', problem);
	for (const point of content.setPoints) {
		const [low, high] = point.par ?? [null, null];
		if ((low !== null && point.value < low) || (high !== null && point.value > high))
			say('setPoints', `${point.parameter}: the set-point lies outside its own PAR.`);
	}
	if (stops(fit) && (content.justification.match(/\p{L}/gu) ?? []).length < 20)
		say(
			'justification',
			`Fit ${fit.number} has a finding that stops. Write a justification (at least twenty letters); it prints on the recipe.`
		);
	return problems;
}

async function requireComplete(recipe: Recipe, fitId: string, content: RecipeContent): Promise<void> {
	const fit = await Fit.findByPk(fitId);
	const problems = fit ? submitProblems(content, fit) : [];
	if (problems.length === 0) return;
	throw new AppError(
		'invalid',
		`Not ready for review: ${problems.map((p) => p.message).join(' ')} Add this and submit again.`,
		{ fields: problems, detail: recipe.id }
	);
}

/** Hands a draft to review. On the page its author signs it "Authored" with the password. */
export async function submitRecipe(
	actor: Actor,
	input: SubmitInput
): Promise<{ state: string; version: number }> {
	const seen = await findRecipe(actor, input.recipeId, 'recipe.submit');
	const draft = await findVersion(seen, input.number);
	if (draft.version !== input.version) throw newer(draft);
	if (!mayMove(draft.state, 'submit')) throw wrongState(`Version ${draft.number} is ${draft.state} already.`);
	await requireComplete(seen, draft.fitId, recipeContent.parse(draft.content));
	const signs = !actor.scopes;
	if (signs) await askPassword(actor, seen, draft.number, input.password ?? '');
	return write(async (tx) => {
		const recipe = await findRecipe(actor, input.recipeId, 'recipe.submit', tx);
		const row = await findVersion(recipe, input.number, tx);
		if (row.version !== input.version) throw newer(row);
		if (!mayMove(row.state, 'submit')) throw wrongState(`Version ${row.number} is ${row.state} already.`);
		if (signs)
			requireSameVersion(recipe, row, {
				...input,
				contentHash: input.contentHash ?? row.contentHash,
				password: ''
			});
		const contributorIds = [...new Set([...row.contributorIds, actor.userId])];
		await moveVersion(tx, row, { state: 'in review', submittedAt: new Date(), contributorIds });
		if (signs) await writeSignature(tx, actor, recipe, row, { meaning: 'Authored', comment: input.comment });
		await appendAudit(tx, actor, {
			type: 'recipe.submitted',
			payload: { number: row.number, contentHash: row.contentHash },
			...about(recipe, row.number)
		});
		await tellGroup(
			tx,
			recipe.groupId,
			{
				subject: 'A recipe waits for your review',
				text: `${actor.name} submitted a recipe version for review.\n\nOpen it: ${link(`/recipes/${recipe.id}`)}\n`
			},
			{ roles: ['group_lead'], except: actor.userId }
		);
		return { state: 'in review', version: row.version + 1 };
	});
}

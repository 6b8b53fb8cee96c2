import { differences, type Difference } from '$lib/recipe/differences';
import { isEditable, mayBeVerified, mayMove, mayStartNext } from '$lib/recipe/states';
import { recipeContent, type RecipeState } from '$lib/schemas/recipe';
import { Fit, Group, RecipeVersion, ReviewComment, Study, User, type Recipe } from '../database/models';
import { AppError } from '../errors';
import { can, type Actor } from '../policy';
import {
	confirm,
	confirmationCandidates,
	type Confirmation,
	type ConfirmationCandidate
} from './confirmation';
import { findRecipe, findVersion } from './find';
import { findingsInWords, fitRuns } from './fit-facts';
import { holdersOf, type Holder } from './holders';
import { wrote } from './validate-recipe';
import { versionView, type VersionView } from './version-view';

export interface RecipeView {
	recipe: { id: string; number: number; title: string; groupId: string; groupName: string };
	study: { id: string; name: string; decision: string };
	shown: VersionView;
	newest: number;
	versions: {
		number: number;
		state: RecipeState;
		author: string;
		reason: string | null;
		updatedAt: Date;
	}[];
	fit: { id: string; number: number; status: string; stops: string[]; parameters: string[] };
	fitRuns: { number: number; revision: number }[];
	difference: { with: number; places: Difference[] } | null;
	comments: { id: string; printedName: string; text: string; anchor: string | null; at: Date }[];
	holders: Holder[];
	confirmation: {
		chosen: Confirmation | null;
		/** Why the chosen run could not be held against the kinetics. */
		problem: string | null;
		candidates: ConfirmationCandidate[];
	};
	may: {
		edit: boolean;
		submit: boolean;
		return: boolean;
		validate: boolean;
		/** Why a group lead cannot sign just now. */
		notValidate: string | null;
		verify: boolean;
		share: boolean;
		withdraw: boolean;
		export: boolean;
		startNext: boolean;
		comment: boolean;
	};
}

async function confirmationOf(fit: Fit, runId: string | null): Promise<RecipeView['confirmation']> {
	const candidates = await confirmationCandidates(fit);
	if (!runId) return { chosen: null, problem: null, candidates };
	try {
		return { chosen: await confirm(fit, runId), problem: null, candidates };
	} catch (caught) {
		if (!(caught instanceof AppError)) throw caught;
		return { chosen: null, problem: caught.message, candidates };
	}
}

function mayOf(
	actor: Actor,
	recipe: Recipe,
	version: RecipeVersion,
	newest: boolean,
	signed: boolean
): RecipeView['may'] {
	const allowed = (action: Parameters<typeof can>[2]) => can(actor, recipe.groupId, action);
	const { state } = version;
	const own = wrote(actor, version);
	const reviews = allowed('recipe.validate') && mayMove(state, 'validate');
	return {
		edit: allowed('recipe.write') && isEditable(state),
		submit: allowed('recipe.submit') && mayMove(state, 'submit'),
		return: allowed('recipe.return') && mayMove(state, 'return'),
		validate: reviews && !own,
		notValidate: reviews && own ? 'You wrote this version, so another group lead has to validate it.' : null,
		verify: allowed('recipe.verify') && mayBeVerified(state) && !own && !signed,
		share: allowed('recipe.share') && state === 'validated',
		withdraw: allowed('recipe.withdraw') && mayMove(state, 'withdraw'),
		export: allowed('workbook.export'),
		startNext: allowed('recipe.write') && newest && mayStartNext(state),
		comment: allowed('recipe.comment') && state !== 'draft'
	};
}

async function versionsOf(
	recipeId: string
): Promise<{ rows: RecipeVersion[]; list: RecipeView['versions'] }> {
	const rows = await RecipeVersion.findAll({ where: { recipeId }, order: [['number', 'DESC']] });
	const people = await User.findAll({
		where: { id: [...new Set(rows.map((r) => r.authorId))] },
		attributes: ['id', 'name']
	});
	const list = rows.map((r) => ({
		number: r.number,
		state: r.state,
		author: people.find((p) => p.id === r.authorId)?.name ?? 'somebody who has left',
		reason: r.reason,
		updatedAt: r.updatedAt
	}));
	return { rows, list };
}

function differenceOf(rows: RecipeVersion[], version: RecipeVersion): RecipeView['difference'] {
	const before = rows.find((r) => r.number === version.number - 1);
	if (!before) return null;
	return {
		with: before.number,
		places: differences(recipeContent.parse(before.content), recipeContent.parse(version.content))
	};
}

/** One version of a recipe (the newest, unless a number is given) with all that its page shows. */
export async function readRecipe(actor: Actor, recipeId: string, number?: number): Promise<RecipeView> {
	const recipe = await findRecipe(actor, recipeId, 'recipe.read');
	const version = await findVersion(recipe, number);
	const fit = await Fit.findByPk(version.fitId, { rejectOnEmpty: true });
	const { confirmationRunId } = recipeContent.parse(version.content);
	const [shown, versions, study, group, runs, comments, holders, confirmation] = await Promise.all([
		versionView(recipe, version),
		versionsOf(recipe.id),
		Study.findByPk(recipe.studyId, { rejectOnEmpty: true }),
		Group.findByPk(recipe.groupId, { attributes: ['id', 'name'] }),
		fitRuns(fit.id),
		ReviewComment.findAll({ where: { recipeVersionId: version.id }, order: [['createdAt', 'ASC']] }),
		holdersOf(recipe.id),
		confirmationOf(fit, confirmationRunId)
	]);
	const newest = versions.rows[0].number;
	return {
		recipe: {
			id: recipe.id,
			number: recipe.number,
			title: recipe.title,
			groupId: recipe.groupId,
			groupName: group?.name ?? ''
		},
		study: { id: study.id, name: study.name, decision: study.decision },
		shown,
		newest,
		versions: versions.list,
		fit: {
			id: fit.id,
			number: fit.number,
			status: fit.report.status,
			stops: findingsInWords(fit)
				.filter((f) => f.level === 'stop')
				.map((f) => f.message),
			parameters: fit.report.parameters.filter((p) => p.id.endsWith('.kRef')).map((p) => p.id)
		},
		fitRuns: runs.map((r) => ({ number: r.number, revision: r.revision })),
		difference: differenceOf(versions.rows, version),
		comments: comments.map((c) => ({
			id: c.id,
			printedName: c.printedName,
			text: c.text,
			anchor: c.anchor,
			at: c.createdAt
		})),
		holders,
		confirmation,
		may: mayOf(
			actor,
			recipe,
			version,
			version.number === newest,
			shown.signatures.some((signature) => signature.userId === actor.userId)
		)
	};
}

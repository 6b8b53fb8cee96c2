import type { RecipeContent } from '$lib/schemas/recipe';
import { createRecipe } from '../recipes/create-recipe';
import { readRecipe } from '../recipes/read-recipe';
import { saveRecipe } from '../recipes/save-recipe';
import { shareRecipe } from '../recipes/share-recipe';
import { submitRecipe } from '../recipes/submit-recipe';
import { validateRecipe } from '../recipes/validate-recipe';
import { computeWindow } from '../windows/compute-window';
import { DEMO_PASSWORD } from './people';
import { CRITERIA } from './coupling';
import type { Cast } from './steps';

interface Basis {
	studyId: string;
	fitId: string;
	confirmationRunId: string;
}

const CHARGES: Record<string, Partial<RecipeContent['charges'][number]>> = {
	A: { material: 'QN-7', assayPercent: 98.5, tolerancePercent: 1 },
	solvent: { material: 'solvent QS-2 (invented)', densityKgPerL: 0.87, tolerancePercent: 2 }
};

const OPERATIONS: Partial<Record<string, Partial<RecipeContent['procedure'][number]>>> = {
	Charge: { text: 'QN-7 and solvent at 20 °C, stir at 150 1/min or more', durationMin: 20 },
	Heat: { text: 'jacket to 42 °C; the hold counts from 39 °C internal', durationMin: 30, fromC: 20 },
	Cool: { text: 'to 5 °C without delay', durationMin: 60, toC: 5 }
};

/** What the chemist fills in beside what fit, window and study have put there already. All of it is invented. */
function complete(content: RecipeContent, confirmationRunId: string): RecipeContent {
	return {
		...content,
		charges: content.charges.map((c) => ({
			...c,
			...CHARGES[c.id === 'solvent' ? 'solvent' : (c.species ?? '')]
		})),
		setPoints: content.setPoints.map((p) =>
			p.kind === 'temperature' ? { ...p, nor: [39, 41] as [number, number] } : p
		),
		procedure: content.procedure.map((o) => ({ ...o, ...OPERATIONS[o.kind] })),
		equipment: [
			{ id: 'vessel', text: 'jacketed vessel, 400 L or more, rated for the solvent at 60 °C' },
			{ id: 'stirrer', text: 'agitation at 150 1/min or more; internal temperature logged every minute' }
		],
		ipc: [
			{
				id: 'ipc1',
				operation: null,
				atMin: 195,
				test: 'A and C by the group’s assay method',
				limit: 'A NMT 1.0 % of charge, C NMT 3.0 % of charge',
				lagMin: 45,
				ifNotMet: 'sample again after 15 min; quench at the end of the hold in any case'
			}
		],
		hazards: [
			{
				id: 'sds1',
				product: 'solvent QS-2 (invented)',
				supplier: 'Invented Supplies',
				revisionDate: '2026-03-02',
				language: 'en',
				signalWord: 'Danger',
				statements: [{ code: 'H225', text: 'Highly flammable liquid and vapour' }]
			}
		],
		confirmationRunId
	};
}

/** A recipe through its whole life: draft, review, validation by a second person, shared with the group that runs it. */
export async function seedRecipe(cast: Cast, of: Basis): Promise<void> {
	const { chemist, lead, holderId } = cast;
	const window = await computeWindow(chemist, {
		fitId: of.fitId,
		input: {
			temperature: { value: 40, unit: 'degC' },
			charge: { A: { value: 0.4, unit: 'mol/L' } },
			criteria: CRITERIA
		}
	});
	const recipe = await createRecipe(chemist, {
		studyId: of.studyId,
		fitId: of.fitId,
		windowId: window.id,
		title: 'QN-7 coupling at 40 °C',
		scale: { value: 50, unit: 'kg' }
	});
	const draft = (await readRecipe(chemist, recipe.id)).shown;
	const saved = await saveRecipe(chemist, {
		recipeId: recipe.id,
		number: 1,
		version: draft.version,
		content: complete(draft.content, of.confirmationRunId)
	});
	const seen = { recipeId: recipe.id, number: 1, password: DEMO_PASSWORD };
	await submitRecipe(chemist, { ...seen, version: saved.version, contentHash: saved.contentHash });
	const inReview = (await readRecipe(lead, recipe.id)).shown;
	await validateRecipe(lead, {
		...seen,
		version: inReview.version,
		contentHash: inReview.contentHash,
		comment: 'Run 4 lies where the fit puts it.'
	});
	await shareRecipe(lead, { recipeId: recipe.id, number: 1, groupId: holderId });
}

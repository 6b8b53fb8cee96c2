/** What is asked of a fit by default: what the study decides by, the maxima of intermediates, and what there is at the end. */
import type { CriterionContent } from '$lib/schemas/criterion';
import type { FitRequest } from '$lib/schemas/fit';
import type { AskedDecision } from '$lib/schemas/fit-analysis';
import { isFitted } from '$lib/schemas/quantity';

const MOST_CRITERIA = 10;
const MOST_MAXIMA = 5;
/** Asked for the starting materials of a study that states no criterion. */
const USUAL_CONVERSIONS = [0.95, 0.99];

/** Species that are formed and used up again: only these can pass through a maximum of their own. */
export function intermediates({ species, steps }: FitRequest): string[] {
	const usedUp = new Set(steps.map((s) => s.reactant));
	const formed = new Set(steps.flatMap((s) => s.products.map((p) => p.species)));
	for (const { reactant, products, reverse } of steps) {
		if (!reverse) continue;
		formed.add(reactant);
		for (const p of products) usedUp.add(p.species);
	}
	return species.map((s) => s.id).filter((id) => usedUp.has(id) && formed.has(id));
}

function charged(run: FitRequest['runs'][number], { species, steps }: FitRequest): string[] {
	return species
		.filter((s) => s.role !== 'reagent in excess' && steps.some((step) => step.reactant === s.id))
		.map((s) => s.id)
		.filter((id) => {
			const amount = run.initial[id];
			return amount !== undefined && (isFitted(amount) || amount.value > 0);
		});
}

const lastTime = (run: FitRequest['runs'][number]): number =>
	run.timepoints.reduce((last, p) => Math.max(last, p.time), 0);

/** @param index place of the run in the request */
export function usualQuestions(
	request: FitRequest,
	index: number,
	criteria: CriterionContent[]
): AskedDecision[] {
	const run = request.runs[index];
	const known = (id: string | undefined) => id === undefined || request.species.some((s) => s.id === id);
	const stated = criteria.filter((c) => known(c.species) && known(c.versus)).slice(0, MOST_CRITERIA);
	const last = lastTime(run);
	return [
		...stated.map((criterion): AskedDecision => ({ kind: 'criterion', criterion })),
		...(stated.length
			? []
			: charged(run, request)
					.slice(0, 2)
					.flatMap((species) =>
						USUAL_CONVERSIONS.map((conversion): AskedDecision => ({
							kind: 'conversion',
							species,
							conversion
						}))
					)),
		...intermediates(request)
			.slice(0, MOST_MAXIMA)
			.map((species): AskedDecision => ({ kind: 'maximum', species })),
		...(last > 0 ? [{ kind: 'composition' as const, time: last }] : [])
	];
}

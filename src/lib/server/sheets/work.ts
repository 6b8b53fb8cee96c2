/** How many Stop and Ask findings of a sheet's tables still wait for an answer, as last settled. */
export function openQuestions(work: unknown): number {
	const open = (work as { open?: unknown } | null)?.open;
	return typeof open === 'number' && open > 0 ? open : 0;
}

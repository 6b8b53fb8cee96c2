import type { CriterionContent } from '$lib/schemas/study';

/** Species that the acceptance criteria speak of, in their order, each once. */
export const speciesNamed = (criteria: CriterionContent[]): string[] => [
	...new Set(criteria.map((criterion) => criterion.species))
];

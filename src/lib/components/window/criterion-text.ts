import type { CriterionContent } from '$lib/schemas/criterion';

/** "A NMT 1 % of charge", "conversion of A NLT 99 %", "ratio of C to B NMT 0.05". */
export function criterionText(c: CriterionContent): string {
	const limit = `${c.relation} ${c.limit}${c.unit === '1' ? '' : ` ${c.unit}`}`;
	switch (c.quantity ?? 'amount') {
		case 'amount':
			return `${c.species} ${limit}`;
		case 'conversion':
			return `conversion of ${c.species} ${limit}`;
		case 'selectivity':
			return `selectivity to ${c.species} from ${c.versus} ${limit}`;
		case 'solution yield':
			return `solution yield of ${c.species} on ${c.versus} ${limit}`;
		case 'ratio':
			return `ratio of ${c.species} to ${c.versus} ${limit}`;
	}
}

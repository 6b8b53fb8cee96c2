import type { SpeciesContent } from '$lib/schemas/scheme';
import type { GridWorkbook, Proposal, SavedMapping, Settlement } from '$lib/schemas/sheet';
import type { SheetWork, TableWork } from '$lib/schemas/sheet-work';
import { settledAsProposed } from '$lib/assay/as-proposed';
import { propose, settle, type Checks } from '$lib/assay';

/** What the reader needs to know beside the sheet itself. */
export interface Surroundings {
	species: SpeciesContent[];
	saved: SavedMapping[];
	/** Limits of the group, or of the site where it has none of its own. */
	checks: Partial<Checks>;
}

export interface ExamineTask extends Surroundings {
	workbook: GridWorkbook;
	work: SheetWork;
	/** Only these tables are settled; all, when left out. */
	only?: string[];
	/** What is asked counts, not the values: settlements come without points and run, which are long to hand over. */
	questionsOnly?: boolean;
}

export interface Examined {
	proposal: Proposal;
	settlements: Record<string, Settlement>;
}

/** Work on a table, or what the reader proposes where nobody has worked on it yet. */
export function workOn(proposal: Proposal, work: SheetWork, key: string): TableWork | null {
	const own = work.tables[key];
	if (own) return own;
	const table = proposal.tables.find((t) => t.id === key);
	return table ? { mapping: table.mapping, answers: {}, corrections: [], name: '' } : null;
}

/** Proposal and settlement of a sheet; pure, in a request or in a worker alike. */
export function examineHere(task: ExamineTask): Examined {
	const { workbook, species, saved, checks, work } = task;
	const proposal = propose(workbook, species, { saved, checks });
	const keys = task.only ?? [...new Set([...proposal.tables.map((t) => t.id), ...Object.keys(work.tables)])];
	const settlements: Examined['settlements'] = {};
	for (const key of keys) {
		const own = workOn(proposal, work, key);
		if (!own) continue;
		const { mapping, answers, corrections } = own;
		const untouched = work.tables[key] ? null : settledAsProposed(mapping);
		const settled = untouched ?? settle({ workbook, species, mapping, answers, corrections, checks });
		settlements[key] = task.questionsOnly ? { ...settled, preview: [], run: null } : settled;
	}
	return { proposal, settlements };
}

/**
 * What a page asks of the sheet reader, and what it is told: all that it shows, and never the values of a whole sheet. The
 * service settles everything once more by itself before a run is made.
 */
import { CHECKS, propose, proposeBlock, settle, timeForm, type Checks, type TimeForm } from '$lib/assay';
import { settledAsProposed } from '$lib/assay/as-proposed';
import type { SpeciesContent } from '$lib/schemas/scheme';
import type {
	Answers,
	Block,
	CellCorrection,
	GridWorkbook,
	Mapping,
	Proposal,
	SavedMapping,
	Settlement,
	TableProposal
} from '$lib/schemas/sheet';
import { logSpan, type LogSpan } from '$lib/schemas/temperature-log';

/** The sheet and its surroundings, given once. The workbook travels as text: quicker to hand over than as objects. */
export interface Opening {
	workbookJson: string;
	species: SpeciesContent[];
	saved: SavedMapping[];
	checks?: Partial<Checks>;
}

export interface Decided {
	mapping: Mapping;
	answers: Answers;
	corrections: CellCorrection[];
}

/** A part of the sheet that a person marked. */
export interface DrawnPlace {
	key: string;
	sheet: string;
	block: Block;
	headerRows: number[] | null;
}

/** A settlement without its points. */
export interface Settled extends Pick<
	Settlement,
	'findings' | 'open' | 'needs' | 'mapping' | 'plausibility' | 'rest'
> {
	/** How times carry their unit in the cells themselves. */
	times: TimeForm | null;
	/** The sentence on the mass balance, where there is one. */
	balance: string | null;
	/** Whether a run could be made of the table as it stands. */
	ready: boolean;
	/** Corrections of the run with the values that answers gave; null while it is not ready. */
	corrections: CellCorrection[] | null;
	/** Null: no log, or the run is not ready. */
	log: LogSpan | null;
}

/** Name of a task with what it takes and what it gives. */
export interface Tasks {
	open: { takes: Opening; gives: Proposal };
	settle: { takes: Decided; gives: Settled };
	draw: { takes: DrawnPlace; gives: TableProposal | null };
}
export type TaskName = keyof Tasks;

function shownOf(settlement: Settlement, times: TimeForm | null): Settled {
	const { findings, open, needs, mapping, plausibility, rest, massBalance, run } = settlement;
	return {
		findings,
		open,
		needs,
		mapping,
		plausibility,
		rest,
		times,
		balance: massBalance?.message ?? null,
		ready: run !== null,
		corrections: run?.corrections ?? null,
		log: run ? logSpan(run) : null
	};
}

/** One sheet, examined as often as it is asked; the same in a worker and on the page's own thread. */
export class Examiner {
	private workbook: GridWorkbook | null = null;
	private species: SpeciesContent[] = [];
	private saved: SavedMapping[] = [];
	private checks: Checks = CHECKS;
	private proposed: Mapping[] = [];

	perform<N extends TaskName>(name: N, task: Tasks[N]['takes']): Tasks[N]['gives'] {
		const performers: { [K in TaskName]: (task: Tasks[K]['takes']) => Tasks[K]['gives'] } = {
			open: (opening) => this.open(opening),
			settle: (decided) => this.settle(decided),
			draw: (place) => this.draw(place)
		};
		return performers[name](task);
	}

	private get book(): GridWorkbook {
		if (!this.workbook) throw new Error('No sheet was opened.');
		return this.workbook;
	}

	private open({ workbookJson, species, saved, checks }: Opening): Proposal {
		this.workbook = JSON.parse(workbookJson) as GridWorkbook;
		[this.species, this.saved] = [species, saved];
		this.checks = { ...CHECKS, ...checks };
		const proposal = propose(this.workbook, species, { saved, checks });
		this.proposed = proposal.tables.map((t) => t.mapping);
		return proposal;
	}

	private settle(decided: Decided): Settled {
		const { species, checks } = this;
		const settlement =
			this.asProposed(decided) ?? settle({ workbook: this.book, species, checks, ...decided });
		return shownOf(settlement, timeForm(this.book, settlement.mapping));
	}

	/** A table that nobody touched yet was settled when it was proposed; its mapping comes back as a copy. */
	private asProposed({ mapping, answers, corrections }: Decided): Settlement | null {
		if (Object.keys(answers).length > 0 || corrections.length > 0) return null;
		const text = JSON.stringify(mapping);
		const own = this.proposed.find((m) => m.table === mapping.table && JSON.stringify(m) === text);
		return own ? settledAsProposed(own) : null;
	}

	private draw({ key, sheet, block, headerRows }: DrawnPlace): TableProposal | null {
		return proposeBlock(this.book, this.species, sheet, block, headerRows, key, {
			saved: this.saved,
			checks: this.checks
		});
	}
}

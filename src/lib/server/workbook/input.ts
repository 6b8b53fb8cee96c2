import type { Difference } from '$lib/recipe/differences';
import type { RunContent } from '$lib/schemas/run';
import type { CriterionContent } from '$lib/schemas/study';
import type { GridWorkbook } from '$lib/schemas/sheet';
import type { FitReport, FitRequest } from '$lib/schemas/fit';
import type { VersionView } from '../recipes/version-view';

/** A source file, cell for cell as it was received. */
export interface ReceivedFile {
	fileName: string;
	sha256: string;
	size: number;
	receivedAt: Date;
	/** Null where the file cannot be read any more; its checksum stands all the same. */
	grid: GridWorkbook | null;
}

export interface UsedRun {
	label: string;
	number: number;
	revision: number;
	current: number;
	fileName: string | null;
	content: RunContent;
}

export interface FitLine {
	number: number;
	status: string;
	scheme: string;
	runs: string;
	pointsUsed: number;
	weightedSsr: number;
	s: number | null;
	aicc: number | null;
	parameters: string;
	options: string;
	excluded: string;
	by: string;
	at: Date;
	engineVersion: string;
	seed: number;
	used: boolean;
}

export interface AuditLine {
	seq: number;
	at: string;
	printedName: string;
	role: string | null;
	source: string;
	type: string;
	objectType: string;
	objectVersion: number | null;
	payload: string;
	reason: string | null;
	prevHash: string;
	hash: string;
}

/** All that one workbook says, read before the first cell is written. */
export interface WorkbookInput {
	site: { name: string; timeZone: string; softwareVersion: string };
	exported: { by: string; at: Date };
	group: { name: string; gxp: boolean };
	study: { name: string; decision: string; criteria: CriterionContent[] };
	recipe: { id: string; number: number; title: string };
	shown: VersionView;
	versions: { number: number; state: string; author: string; reason: string | null; updatedAt: Date }[];
	difference: { with: number; places: Difference[] } | null;
	comments: { printedName: string; text: string; anchor: string | null; at: Date }[];
	fit: { number: number; request: FitRequest; report: FitReport; inputHash: string };
	labels: string[];
	received: ReceivedFile[];
	used: UsedRun[];
	fits: FitLine[];
	windows: { number: number; at: Date; lines: string[] }[];
	audit: { filter: string; total: number; lines: AuditLine[] };
}

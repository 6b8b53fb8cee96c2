/** The cells of one channel while they are being settled, and the question that one or several of them raise. */
import type { AssayValue } from '$lib/schemas/run';
import type { CellReading } from './cells';
import type { Channel } from './channels';
import type { Taken } from './answers';
import type { Examination, FindingSpec } from './examination';
import { because, ENTER, MISSING, someOf } from './wording';
import type { Sample } from './samples';

/** One cell of a channel while it is being settled. */
export interface Spot {
	sample: Sample;
	row: number;
	column: number;
	cell: string;
	reading: CellReading;
	/** Left as missing by an answer, so that it is not noted a second time. */
	decided?: boolean;
	set(value: AssayValue): void;
}

export const ofKind = <K extends CellReading['kind']>(spots: Spot[], ...kinds: K[]) =>
	spots.filter((s): s is Spot & { reading: Extract<CellReading, { kind: K }> } =>
		(kinds as string[]).includes(s.reading.kind)
	);

export const cellsOf = (spots: Spot[]) => spots.map((s) => s.cell);

export const letter = (channel: Channel, spots: Spot[]) =>
	spots[0]?.cell.replace(/\d+$/, '') ?? String(channel.column);

/** Asks about one cell, or about several alike at once; entering a value is offered for a single cell. */
export function askSpots(
	ex: Examination,
	spots: Spot[],
	spec: Omit<FindingSpec, 'cells' | 'options' | 'key'> & { key: string },
	more: FindingSpec['options'] = []
): Taken | null {
	if (spots.length === 0) return null;
	const single = spots.length === 1;
	const options = [...(single ? [ENTER()] : []), MISSING, ...more];
	const taken = ex.ask({ ...spec, cells: cellsOf(spots), key: single ? spots[0].cell : spec.key, options });
	if (taken?.key === 'missing') leaveMissing(ex, spots, spec.found, taken.reason);
	if (taken?.key === 'enter') enterValue(ex, spots[0], taken, spec.found);
	return taken;
}

export function leaveMissing(ex: Examination, spots: Spot[], why: string, reason?: string): void {
	for (const s of spots) {
		s.reading = { kind: 'missing', text: '' };
		s.decided = true;
		s.set(null);
	}
	ex.conversions.push(`${someOf(cellsOf(spots), 8)} left as missing: ${why}${because(reason)}.`);
}

function enterValue(ex: Examination, spot: Spot, taken: Taken, found: string): void {
	ex.correct(spot.cell, taken.text(), taken.reason ?? `Value entered in place of ${found}.`);
	const again = ex.value(spot.row, spot.column);
	if (
		again.kind === 'number' ||
		again.kind === 'below' ||
		again.kind === 'above' ||
		again.kind === 'missing'
	) {
		spot.reading = again;
		return;
	}
	ex.reopen(`"${taken.text()}" is not a value. Write a number, a limit such as <2, or leave it as missing.`);
}

export type NumberSpot = Spot & { reading: Extract<CellReading, { kind: 'number' }> };

/** The time column: every sample gets its elapsed time, in the unit of the column. B18 and B25 for cells that hold no time; README.md lists the other rules. */
import type { Block, TimeUnit } from '$lib/schemas/sheet';
import type { ColumnHeader } from './columns';
import { withDates } from './date-and-time';
import { elapsed, noteWrapped } from './elapsed-time';
import type { Examination } from './examination';
import { because, ENTER } from './wording';
import { type Sample, timeColumn, type Timed } from './samples';
import { stopBackwards } from './time-order';
import { stopMixedKinds, timeUnit } from './time-unit';
import type { TimeReading } from './times';

export interface Times {
	unit: TimeUnit;
	samples: Timed[];
	/** Rows from here on are a run of their own, as the person said. */
	rest: Block | null;
}

export function settleTimes(ex: Examination, samples: Sample[], headers: Map<number, ColumnHeader>): Times {
	const column = timeColumn(ex);
	const header = headers.get(column);
	const kept = dropUnreadable(ex, samples);
	const written = kept.map((s) => ex.time(s.time.row, s.time.column));
	const dated = withDates(ex, kept, written);
	const readings = dated ?? written;
	stopMixedKinds(ex, kept, readings, column);
	const unit = timeUnit(ex, kept, readings, header, column);
	const seconds = dated ? elapsed(ex, kept, readings, header, unit) : kept.map(() => null);
	const timed: Timed[] = kept.map((sample, i) => {
		const reading = readings[i];
		const plain = reading.kind === 'number' && unit.stated ? reading.value : null;
		return { sample, seconds: seconds[i], plain };
	});
	noteWrapped(ex, kept, readings);
	const { samples: ordered, rest } = stopBackwards(ex, timed, unit.unit);
	return { unit: unit.unit, samples: ordered, rest };
}

/** Cells of the time column that are blank, errors or text: one question each, the row can be left out. */
function dropUnreadable(ex: Examination, samples: Sample[]): Sample[] {
	const kept: Sample[] = [];
	const asked = new Set<number>();
	for (const s of samples) {
		const reading = ex.time(s.time.row, s.time.column);
		if (reading.kind !== 'blank' && reading.kind !== 'error' && reading.kind !== 'text') {
			kept.push(s);
			continue;
		}
		if (asked.has(s.time.row)) continue;
		asked.add(s.time.row);
		if (askTimeCell(ex, s, reading)) kept.push(...samples.filter((other) => other.time.row === s.time.row));
	}
	return kept;
}

/** True when the cell has a time after the answer. */
function askTimeCell(ex: Examination, s: Sample, reading: TimeReading): boolean {
	const cell = ex.at(s.time.row, s.time.column);
	const shown = ex.shown(s.time.row, s.time.column);
	const found = reading.kind === 'blank' ? 'no time' : `"${shown.slice(0, 60)}"`;
	const taken = ex.ask({
		rule: reading.kind === 'error' ? 'B25' : 'B18',
		level: 'stop',
		cells: [cell],
		found,
		expected: 'a time',
		message:
			reading.kind === 'blank'
				? `Row ${s.row} has values but no time in ${cell}.`
				: `${cell} holds ${found} where a time is expected.`,
		options: [ENTER('Enter the time'), { key: 'leave-out', label: 'Leave the row out' }]
	});
	if (taken?.key === 'leave-out')
		ex.conversions.push(`Row ${s.row} left out: ${found} in ${cell}${because(taken.reason)}.`);
	if (taken?.key !== 'enter') return false;
	ex.correct(cell, taken.text(), taken.reason ?? `Time entered for row ${s.row}, which held ${found}.`);
	const again = ex.time(s.time.row, s.time.column);
	if (again.kind !== 'blank' && again.kind !== 'text' && again.kind !== 'error') return true;
	ex.reopen(`"${taken.text()}" is not a time.`);
	return false;
}

/** The time column: every sample gets its elapsed time, in the unit of the column. README.md lists the rules by file. */
import type { Block, TimeUnit } from '$lib/schemas/sheet';
import type { Channel } from './channels';
import type { ColumnHeader } from './columns';
import { withDates } from './date-and-time';
import { readAsDays } from './day-fractions';
import { elapsed, noteWrapped } from './elapsed-time';
import type { Examination } from './examination';
import { type Sample, timeColumn, type Timed } from './samples';
import { settleTimeCells } from './time-cells';
import { stopBackwards } from './time-order';
import { stopMixedKinds, timeUnit } from './time-unit';
import { daysToSeconds, type TimeReading } from './times';

export interface Times {
	unit: TimeUnit;
	samples: Timed[];
	/** Rows from here on are a run of their own, as the person said. */
	rest: Block | null;
}

export function settleTimes(
	ex: Examination,
	samples: Sample[],
	headers: Map<number, ColumnHeader>,
	channels: Channel[]
): Times {
	const column = timeColumn(ex);
	const header = headers.get(column);
	const kept = settleTimeCells(ex, samples, channels);
	const written = kept.map((s) => ex.time(s.time.row, s.time.column));
	const dated = withDates(ex, kept, written);
	const out = stopMixedKinds(ex, kept, dated ?? written, column);
	const within = <T>(all: T[]) => all.filter((_, i) => !out.has(i));
	return unitAndTimes(ex, within(kept), within(dated ?? written), header, dated !== null);
}

function unitAndTimes(
	ex: Examination,
	kept: Sample[],
	readings: TimeReading[],
	header: ColumnHeader | undefined,
	dated: boolean
): Times {
	const column = timeColumn(ex);
	const unit = timeUnit(ex, kept, readings, header, column);
	const seconds = dated ? elapsed(ex, kept, readings, header, unit) : kept.map(() => null);
	const days = readAsDays(ex, kept, readings, unit);
	const timed: Timed[] = kept.map((sample, i) => {
		const reading = readings[i];
		if (reading.kind !== 'number' || !unit.stated) return { sample, seconds: seconds[i], plain: null };
		if (days === null) return { sample, seconds: null, plain: null };
		// A corrected time is typed in the unit of the column.
		if (days && !ex.isCorrected(sample.time.row, sample.time.column))
			return { sample, seconds: daysToSeconds(reading.value), plain: null };
		return { sample, seconds: seconds[i], plain: reading.value };
	});
	noteWrapped(ex, kept, readings);
	const { samples: ordered, rest } = stopBackwards(ex, timed, unit.unit);
	return { unit: unit.unit, samples: ordered, rest };
}

/**
 * B17: times that are parts of a day below a header in h or min. A difference of two clock times is stored in days; without a time
 * format 1 h shows as 0.041666667, and read as hours it is 24 times too fast. Asked where every time is whole minutes as days and
 * not as the header says.
 */
import type { Examination } from './examination';
import type { Sample } from './samples';
import type { UnitFound } from './time-unit';
import type { TimeReading } from './times';
import { SECONDS } from './units';
import { figure } from './wording';

/** Far below any sampling scheme, far above the dust of nine decimals in a text file. */
const DUST = 0.002;
const whole = (n: number) => Math.abs(n - Math.round(n)) < DUST;

const MOST_DAYS = 31;

/** True when the numbers are days, as the person said; null while it is asked. */
export function readAsDays(
	ex: Examination,
	samples: Sample[],
	readings: TimeReading[],
	{ unit, stated }: UnitFound
): boolean | null {
	const own = readings.flatMap((r, i) =>
		r.kind === 'number' && r.value !== 0 && !ex.isCorrected(samples[i].time.row, samples[i].time.column)
			? [{ value: r.value, cell: ex.at(samples[i].time.row, samples[i].time.column) }]
			: []
	);
	const clockDays = own.every(({ value }) => value > 0 && value <= MOST_DAYS && whole(value * 1440));
	const repeating = own.filter(({ value }) => Math.abs(value - Number(value.toFixed(4))) > 1e-9);
	if (!stated || ex.timeParts.length > 0 || (unit !== 'h' && unit !== 'min') || own.length < 3 || !clockDays)
		return false;
	if (repeating.length * 2 < own.length || own.every(({ value }) => whole(value * 60))) return false;
	// Steps of seconds, given in h, come out as whole minutes of a day too; but neither in steps of 5 min nor as half seconds.
	const likely =
		own.every(({ value }) => whole(value * 288)) || own.some(({ value }) => !whole(value * SECONDS[unit]));
	if (!likely) return false;
	const { value, cell } = own[0];
	const asHeaded = (value * SECONDS[unit]) / 60;
	const taken = ex.ask({
		rule: 'B17',
		level: 'ask',
		cells: own.map((o) => o.cell),
		key: 'days',
		found: `${figure(value)}, ${figure(Math.round(value * 1440))} min as part of a day`,
		expected: `times in ${unit}`,
		message: `${cell} is ${figure(value)}: as a part of a day, in which a spreadsheet stores times, that is ${figure(Math.round(value * 1440))} min, and so are all others whole minutes. In days, or in ${unit} (${figure(asHeaded)} min)?`,
		options: [
			{ key: 'days', label: `In days: ${figure(Math.round(value * 1440))} min` },
			{ key: 'unit', label: `In ${unit}: ${figure(asHeaded)} min` }
		]
	});
	if (!taken) return null;
	if (taken.key === 'days') ex.conversions.push(`Times read as parts of a day and given in ${unit}.`);
	return taken.key === 'days';
}

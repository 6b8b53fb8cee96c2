/** Rules about single values: B5, B7 to B12, B20, B21, B24 to B26. Gives each cell its value in the column's unit. */
import type { AssayValue } from '$lib/schemas/run';
import type { CellReading } from './cells';
import { channelName, type Channel } from './channels';
import {
	ENTER,
	figure,
	MISSING,
	plural,
	someOf,
	type Examination,
	type FindingSpec,
	type Taken
} from './examination';
import { address, hasFlag } from './grid';
import { askLimits, askNotDetected, askTrace, type Spot } from './limit-rules';
import { convertUnit, type StatedLimits } from './limits';
import type { Sample } from './samples';
import { isRelative } from './units';
import { CELL } from '$lib/schemas/sheet';

/** Values by sample and channel; a spot that is not settled is not in the map. */
export type Values = Map<Sample, Map<string, AssayValue>>;

export function settleValues(
	ex: Examination,
	samples: Sample[],
	channels: Channel[],
	limits: StatedLimits
): Values {
	const values: Values = new Map(samples.map((s) => [s, new Map<string, AssayValue>()]));
	const spots = channels.map((channel) => ({ channel, spots: spotsOf(ex, samples, channel, values) }));
	noteFormulas(
		ex,
		spots.flatMap((s) => s.spots)
	);
	noteTextNumbers(
		ex,
		spots.flatMap((s) => s.spots)
	);
	for (const { channel, spots: own } of spots) {
		stopUnusable(ex, channel, own);
		askTexts(ex, channel, own);
		askUnits(ex, channel, own);
		settlePercent(ex, channel, own);
		askLimits(ex, channel, own, limits);
		askAbove(ex, channel, own);
	}
	askNotDetected(ex, spots, limits);
	for (const { channel, spots: own } of spots) {
		askTrace(ex, channel, own, limits);
		settleZerosAndNegatives(ex, channel, own);
		noteMissing(ex, channel, own);
	}
	return values;
}

function spotsOf(ex: Examination, samples: Sample[], channel: Channel, values: Values): Spot[] {
	return samples.flatMap((sample) => {
		const place = sample.cells.get(channel.id);
		if (!place) return [];
		const cell = address(place.row, place.column);
		const spot: Spot = {
			sample,
			row: place.row,
			column: place.column,
			cell,
			reading: ex.value(place.row, place.column),
			set: (value) => void values.get(sample)?.set(channel.id, value)
		};
		return [spot];
	});
}

const ofKind = <K extends CellReading['kind']>(spots: Spot[], ...kinds: K[]) =>
	spots.filter((s): s is Spot & { reading: Extract<CellReading, { kind: K }> } =>
		(kinds as string[]).includes(s.reading.kind)
	);

const cellsOf = (spots: Spot[]) => spots.map((s) => s.cell);
const letter = (channel: Channel, spots: Spot[]) =>
	spots[0]?.cell.replace(/\d+$/, '') ?? String(channel.column);

/** Asks about one cell, or about several alike at once; entering a value is offered for a single cell. */
function askSpots(
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

function leaveMissing(ex: Examination, spots: Spot[], found: string, reason: string | undefined): void {
	for (const s of spots) {
		s.reading = { kind: 'missing', text: '' };
		s.decided = true;
		s.set(null);
	}
	ex.conversions.push(
		`${someOf(cellsOf(spots), 8)} left as missing: ${found}${reason ? ` (${reason})` : ''}.`
	);
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

/* ---------------------------------------------------------------- B24, B25, B26, B6, B11 */

function stopUnusable(ex: Examination, channel: Channel, spots: Spot[]): void {
	const key = letter(channel, spots);
	const dates = ofKind(spots, 'date');
	if (dates.length > 0)
		askSpots(ex, dates, {
			rule: 'B24',
			level: 'stop',
			key,
			found: `a date (${dates[0].reading.text})`,
			expected: 'a number',
			message: `${someOf(cellsOf(dates))} ${dates.length === 1 ? 'holds' : 'hold'} a date (${dates[0].reading.text}). Spreadsheets turn 1.2 into 1 February, so the number is lost here. Enter the value.`
		});
	const errors = ofKind(spots, 'error');
	if (errors.length > 0)
		askSpots(ex, errors, {
			rule: 'B25',
			level: 'stop',
			key,
			found: `the error ${errors[0].reading.text}`,
			expected: 'a number',
			message: `${someOf(cellsOf(errors))} ${errors.length === 1 ? 'holds' : 'hold'} ${errors[0].reading.text}. Correct it in the sheet, enter the value, or leave it as missing.`
		});
	const uncomputed = ofKind(spots, 'uncomputed');
	if (uncomputed.length > 0)
		askSpots(ex, uncomputed, {
			rule: 'B26',
			level: 'stop',
			key,
			found: 'a formula without a stored result',
			expected: 'a number',
			message: `${someOf(cellsOf(uncomputed))} ${uncomputed.length === 1 ? 'is a formula' : 'are formulas'} without a stored result. Open the file, save it in your spreadsheet program, and upload it again.`
		});
}

function askTexts(ex: Examination, channel: Channel, spots: Spot[]): void {
	const byText = new Map<string, Spot[]>();
	for (const s of ofKind(spots, 'text'))
		byText.set(s.reading.text, [...(byText.get(s.reading.text) ?? []), s]);
	for (const [text, same] of [...byText].slice(0, 50))
		askSpots(ex, same, {
			rule: /^[+-]?[\d.,'\s]+$/.test(text) ? 'B6' : 'B11',
			level: /^[+-]?[\d.,'\s]+$/.test(text) ? 'stop' : 'ask',
			key: `${letter(channel, same)}-${text}`.slice(0, 80),
			found: `"${text.slice(0, 60)}"`,
			expected: 'a number, a limit, or nothing',
			message: `${someOf(cellsOf(same))} ${same.length === 1 ? 'holds' : 'hold'} "${text.slice(0, 60)}", which is no number${ex.decimal ? ` with "${ex.decimal}" as the decimal sign` : ''}. Missing, or a value?`
		});
	const rest = [...byText].slice(50).flatMap(([, same]) => same);
	if (rest.length > 0)
		askSpots(ex, rest, {
			rule: 'B11',
			level: 'ask',
			key: `${letter(channel, rest)}-texts`,
			found: `${plural(rest.length, 'further text')} of other wording`,
			expected: 'numbers, limits, or nothing',
			message: `${plural(rest.length, 'further cell')} of ${channelName(channel)} hold text that is no number. Leave them as missing?`
		});
}

/* ---------------------------------------------------------------- B5 */

function askUnits(ex: Examination, channel: Channel, spots: Spot[]): void {
	const carried = ofKind(spots, 'with unit');
	const byUnit = new Map<string, typeof carried>();
	for (const s of carried) {
		const unit = s.reading.unit.of === 'value' ? s.reading.unit.unit : s.reading.unit.of;
		byUnit.set(unit, [...(byUnit.get(unit) ?? []), s]);
	}
	for (const [unit, same] of byUnit) {
		const text = same[0].reading.text;
		const own = unit === channel.unit;
		const factor = convertUnit(1, unit, channel.unit);
		const options = own
			? [{ key: 'accept', label: `Read as ${figure(same[0].reading.value)}` }]
			: factor !== null
				? [{ key: 'convert', label: `Convert to ${channel.unit}: ${figure(same[0].reading.value * factor)}` }]
				: [];
		const taken = askSpots(
			ex,
			same,
			{
				rule: 'B5',
				level: own || factor !== null ? 'ask' : 'stop',
				key: `${letter(channel, same)}-${unit}`,
				found: `"${text}"`,
				expected: `a number in ${channel.unit ?? 'the unit of the column'}`,
				message: own
					? `"${text}" carries its unit, the column's own. Read as ${figure(same[0].reading.value)}?`
					: `"${text}" is not in the column's unit (${channel.unit ?? 'none chosen yet'}).${factor !== null ? ' Convert it?' : ''}`
			},
			options
		);
		if (taken?.key !== 'accept' && taken?.key !== 'convert') continue;
		for (const s of same) {
			const value = Number((s.reading.value * (factor ?? 1)).toPrecision(15));
			(s as Spot).reading = { kind: 'number', value, percent: false, text: true, odd: false };
		}
		ex.conversions.push(
			`${someOf(cellsOf(same), 8)}: ${own ? "unit in the cell, the column's own" : `converted from ${unit} to ${channel.unit}`}.`
		);
	}
}

/* ---------------------------------------------------------------- B21 */

function settlePercent(ex: Examination, channel: Channel, spots: Spot[]): void {
	const numbers = ofKind(spots, 'number').filter((s) => s.reading.value !== 0);
	const percent = numbers.filter((s) => s.reading.percent);
	const plain = numbers.filter((s) => !s.reading.percent);
	if (percent.length === 0) return;
	const relative = isRelative(channel.unit) || channel.unit === 'fraction of charge';
	if (!relative && channel.unit !== null) return stopPercent(ex, channel, percent);
	if (plain.length > 0) mixedPercent(ex, channel, percent, plain);
	// A fraction column shown in %: the stored number is the fraction.
	if (channel.unit === 'fraction of charge')
		for (const s of percent) s.reading.value = Number((s.reading.value / 100).toPrecision(15));
}

function stopPercent(ex: Examination, channel: Channel, percent: Spot[]): void {
	askSpots(ex, percent, {
		rule: 'B21',
		level: 'stop',
		key: `${letter(channel, percent)}-percent`,
		found: `percentages in a column in ${channel.unit}`,
		expected: `numbers in ${channel.unit}`,
		message: `${someOf(cellsOf(percent))} ${percent.length === 1 ? 'is a percentage' : 'are percentages'} in a column in ${channel.unit}. Correct the column's unit, or leave ${percent.length === 1 ? 'it' : 'them'} as missing.`
	});
}

type NumberSpot = Spot & { reading: Extract<CellReading, { kind: 'number' }> };

function mixedPercent(ex: Examination, channel: Channel, percent: NumberSpot[], plain: NumberSpot[]): void {
	const taken = ex.ask({
		rule: 'B21',
		level: 'stop',
		cells: cellsOf(plain.length <= percent.length ? plain : percent),
		key: `${letter(channel, plain)}-mixed`,
		found: `${plural(percent.length, 'percentage')} and ${plural(plain.length, 'plain number')}`,
		expected: 'one way of writing percent in the column',
		message: `${channelName(channel)} mixes percentages (${someOf(cellsOf(percent), 2)}) and plain numbers (${someOf(cellsOf(plain), 2)}). What are the plain ones, for example ${figure(plain[0].reading.value)}?`,
		options: [
			{ key: 'percent', label: `Already percent: ${figure(plain[0].reading.value)} %` },
			{ key: 'fraction', label: `Fractions: ${figure(plain[0].reading.value * 100)} %` }
		]
	});
	if (!taken) return;
	const fraction = channel.unit === 'fraction of charge';
	for (const s of plain) {
		if (taken.key === 'fraction' && !fraction)
			s.reading.value = Number((s.reading.value * 100).toPrecision(15));
		if (taken.key === 'percent' && fraction)
			s.reading.value = Number((s.reading.value / 100).toPrecision(15));
	}
	ex.conversions.push(
		`${someOf(cellsOf(plain), 8)}: plain numbers among percentages read as ${taken.key === 'percent' ? 'percent' : 'fractions'}.`
	);
}

/* ---------------------------------------------------------------- B12 */

function askAbove(ex: Examination, channel: Channel, spots: Spot[]): void {
	const above = ofKind(spots, 'above');
	const byText = new Map<string, typeof above>();
	for (const s of above) byText.set(s.reading.text, [...(byText.get(s.reading.text) ?? []), s]);
	for (const [text, same] of byText) {
		const limit = same[0].reading.limit;
		const taken = askSpots(
			ex,
			same,
			{
				rule: 'B12',
				level: 'ask',
				key: `${letter(channel, same)}-${text}`.slice(0, 80),
				found: `"${text}"`,
				expected: 'a number, or the upper limit that it lies above',
				message: `"${text}" in ${someOf(cellsOf(same))}: above the upper limit${limit === null ? '' : ` of ${figure(limit)}`}, or missing?`
			},
			[
				limit === null
					? {
							key: 'above',
							label: 'Above the limit of …',
							needsValue: [
								{ key: 'value', label: 'Upper limit', kind: 'number', unit: channel.unit ?? undefined }
							]
						}
					: { key: 'above', label: `Above ${figure(limit)}` }
			]
		);
		if (taken?.key !== 'above') continue;
		const value = limit ?? taken.number();
		for (const s of same) s.set({ above: value });
		ex.conversions.push(`${someOf(cellsOf(same), 8)}: "${text}" kept as above ${figure(value)}.`);
	}
}

/* ---------------------------------------------------------------- B20, zeros, numbers */

function settleZerosAndNegatives(ex: Examination, channel: Channel, spots: Spot[]): void {
	const numbers = ofKind(spots, 'number');
	const low = numbers.filter(
		(s) => s.reading.value < 0 && (channel.loq === null || s.reading.value < -channel.loq)
	);
	const kept = new Set(numbers);
	if (low.length > 0) {
		const taken = askSpots(
			ex,
			low,
			{
				rule: 'B20',
				level: 'ask',
				key: `${letter(channel, low)}-negative`,
				found: `negative: ${figure(low[0].reading.value)}`,
				expected:
					channel.loq === null
						? 'values from zero upward, or noise above −LOQ'
						: `values above −${figure(channel.loq)}`,
				message: `${someOf(cellsOf(low))} ${low.length === 1 ? 'is' : 'are'} negative (${figure(low[0].reading.value)})${channel.loq === null ? ' and no LOQ is known' : `, below −LOQ`}. Keep as noise, or leave as missing?`
			},
			[{ key: 'keep', label: 'Keep as measured' }]
		);
		if (!taken) low.forEach((s) => kept.delete(s));
		if (taken?.key === 'keep')
			ex.conversions.push(`${someOf(cellsOf(low), 8)}: negative values kept as measured.`);
	}
	for (const s of kept) if (s.reading.kind === 'number') s.set(s.reading.value);
	offerCensoring(
		ex,
		channel,
		numbers.filter((s) => s.reading.kind === 'number' && s.reading.value === 0)
	);
}

/** B11: a typed 0 stays 0; where the LOQ is known, "below LOQ" is offered. */
function offerCensoring(ex: Examination, channel: Channel, zeros: Spot[]): void {
	if (zeros.length === 0 || channel.loq === null) return;
	const taken = ex.note({
		rule: 'B11',
		cells: cellsOf(zeros),
		key: `${letter(channel, zeros)}-zero`,
		found: plural(zeros.length, 'typed 0'),
		message: `${someOf(cellsOf(zeros))}: a typed 0 stays 0. The LOQ of ${channel.label} is ${figure(channel.loq)}; "below LOQ" may be what is meant.`,
		options: [
			{ key: 'keep', label: 'Keep 0' },
			{ key: 'censor', label: `Take as below ${figure(channel.loq)}` }
		]
	});
	if (taken?.key !== 'censor') return;
	for (const s of zeros) s.set({ below: channel.loq });
	ex.conversions.push(
		`${someOf(cellsOf(zeros), 8)}: typed 0 taken as below the LOQ of ${figure(channel.loq)}.`
	);
}

function noteMissing(ex: Examination, channel: Channel, spots: Spot[]): void {
	for (const s of ofKind(spots, 'blank', 'missing')) s.set(null);
	const marked = ofKind(spots, 'missing').filter((s) => s.reading.text !== '' && !s.decided);
	if (marked.length === 0) return;
	const texts = [...new Set(marked.map((s) => `"${s.reading.text}"`))];
	ex.note({
		rule: 'B11',
		cells: cellsOf(marked),
		key: `${letter(channel, marked)}-missing`,
		found: someOf(texts),
		message: `${someOf(texts)} in ${someOf(cellsOf(marked))}: taken as missing, never as zero.`
	});
}

/* ---------------------------------------------------------------- B7, B26 notes */

function noteTextNumbers(ex: Examination, spots: Spot[]): void {
	const csv = ex.workbook.kind !== 'xlsx';
	const texts = ofKind(spots, 'number').filter(
		(s) => s.reading.text && (!csv || s.reading.odd) && !ex.isCorrected(s.row, s.column)
	);
	if (texts.length === 0) return;
	const example = texts[0];
	ex.note({
		rule: 'B7',
		cells: cellsOf(texts),
		key: 'text-numbers',
		found: plural(texts.length, 'number written as text', 'numbers written as text'),
		message: `${plural(texts.length, 'number is', 'numbers are')} stored as text or with unusual signs (${someOf(cellsOf(texts))}); ${texts.length === 1 ? 'it was' : 'they were'} read as numbers, for example "${ex.shown(example.row, example.column).slice(0, 30)}" as ${figure(example.reading.value)}.`
	});
}

function noteFormulas(ex: Examination, spots: Spot[]): void {
	const formulas = spots.filter((s) => {
		const cell = ex.view.cell(s.row, s.column);
		return cell !== undefined && hasFlag(cell, CELL.formula) && !hasFlag(cell, CELL.uncomputed);
	});
	if (formulas.length === 0) return;
	ex.note({
		rule: 'B26',
		cells: cellsOf(formulas),
		key: 'formulas',
		found: plural(formulas.length, 'formula', 'formulas'),
		message: `${plural(formulas.length, 'cell is a formula', 'cells are formulas')} (${someOf(cellsOf(formulas))}); the result stored in the file was used.`
	});
}

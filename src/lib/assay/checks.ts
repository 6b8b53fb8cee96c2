/** Checks of what was read: B33 to B36, the temperature log, and the sentence that lets the lab recognise its run. */
import type { ChannelContent } from '$lib/schemas/run';
import { isFitted } from '$lib/schemas/quantity';
import type { FindingOption, MassBalance, TimeUnit } from '$lib/schemas/sheet';
import { channelName, type Channel } from './channels';
import { molarCharge } from './conversions';
import { figure, plural, someOf, type Examination } from './examination';
import { address, columnLetter } from './grid';
import { median, slopeWithInterval } from './statistics';
import type { Point } from './timepoints';

/** B33: without a row at time zero the charge has to come from somewhere. */
export function askCharge(ex: Examination, points: Point[], channels: Channel[]): void {
	const times = points.map((p) => p.time).filter((t) => t !== null);
	const given = Object.keys(ex.mapping.conditions?.initial ?? {}).length > 0;
	if (given || times.length === 0 || Math.min(...times) <= 0) return;
	const species = [
		...new Set([...ex.species.map((s) => s.id), ...channels.flatMap((c) => Object.keys(c.weights))])
	];
	const starting = ex.species.find((s) => s.role === 'starting material')?.id ?? species[0];
	const choices = species.map((id) => ({ key: id, label: id }));
	const what = {
		key: 'species',
		label: 'Charged species',
		kind: 'choice' as const,
		choices,
		...(starting ? { suggested: starting, source: 'scheme' } : {})
	};
	const options: FindingOption[] = [
		{
			key: 'charge',
			label: 'Fix it from the charge …',
			needsValue: [
				what,
				{ key: 'value', label: 'Amount charged', kind: 'number' },
				{
					key: 'unit',
					label: 'Unit',
					kind: 'choice',
					choices: ['mol/L', 'mmol/L', '%'].map((key) => ({ key, label: key }))
				}
			]
		},
		{ key: 'fit', label: 'Let the fit find it', needsValue: [what] }
	];
	const taken = ex.ask({
		rule: 'B33',
		level: 'ask',
		cells: [address(ex.mapping.block.firstRow, ex.mapping.block.firstColumn)],
		key: 'charge',
		found: `the first sample at ${figure(Math.min(...times))}, none at time zero`,
		expected: 'the amounts at time zero',
		message: 'No sample was taken at time zero. Fix the amounts from the charge, or let the fit find them?',
		options
	});
	if (!taken) return;
	const conditions = (ex.mapping.conditions ??= { temperature: null, initial: {}, excess: {} });
	conditions.initial[taken.text('species')] =
		taken.key === 'charge' ? { value: taken.number(), unit: taken.text('unit') } : { fit: true };
}

/** B34: too few points. `parameters` is how many constants the fit is to find, where that is known. */
export function checkCount(
	ex: Examination,
	points: Point[],
	channels: Channel[],
	parameters: number | null
): void {
	const times = new Set(points.map((p) => p.time).filter((t) => t !== null)).size;
	const values = points.reduce((n, p) => n + channels.filter((c) => p.values.get(c.id) != null).length, 0);
	const cells = [address(ex.mapping.block.firstRow, ex.mapping.block.firstColumn)];
	if (parameters !== null && values < parameters)
		ex.ask({
			rule: 'B34',
			level: 'stop',
			cells,
			key: 'parameters',
			found: plural(values, 'value'),
			expected: `at least ${parameters}, one for each constant`,
			message: `The table gives ${plural(values, 'value')} for ${plural(parameters, 'constant')}. Fit it together with other runs, or choose a table with more rows.`,
			options: [{ key: 'together', label: 'It will be fitted together with other runs' }]
		});
	if (times > 0 && times < 5 && points.every((p) => p.time !== null))
		ex.note({
			rule: 'B34',
			cells,
			key: 'few',
			found: plural(times, 'time'),
			message: `Only ${plural(times, 'time')}: the constants will have wide intervals, and lack of fit can hardly be seen.`
		});
}

/** B35: columns that look copied. */
export function noteCopies(ex: Examination, points: Point[], channels: Channel[]): void {
	const series = channels.map((c) =>
		points.map((p) => p.values.get(c.id)).filter((v) => typeof v === 'number')
	);
	channels.forEach((c, i) => {
		const own = series[i];
		const cells = [address(ex.mapping.block.firstRow, c.column)];
		const run = longestRun(own);
		if (own.length >= 4 && own.every((v) => v === own[0]))
			ex.note({
				rule: 'B35',
				cells,
				key: `same-${c.id}`,
				found: `${plural(own.length, 'identical value')}`,
				message: `All values of ${channelName(c)} are ${figure(own[0])}. A copied column?`
			});
		else if (run.length > 15 && run.value !== 0)
			ex.note({
				rule: 'B35',
				cells,
				key: `run-${c.id}`,
				found: `${run.length} times ${figure(run.value)}`,
				message: `${channelName(c)} repeats ${figure(run.value)} ${run.length} times in a row. Copied cells?`
			});
		for (let j = i + 1; j < channels.length; j++)
			if (
				own.length >= 4 &&
				own.length === series[j].length &&
				own.every((v, k) => v === series[j][k]) &&
				own.some((v) => v !== 0)
			)
				ex.note({
					rule: 'B35',
					cells: [...cells, address(ex.mapping.block.firstRow, channels[j].column)],
					key: `pair-${c.id}-${channels[j].id}`,
					found: 'two identical columns',
					message: `${channelName(c)} and ${channelName(channels[j])} hold the same values throughout. A copied column?`
				});
	});
}

function longestRun(values: number[]): { length: number; value: number } {
	let best = { length: 0, value: 0 };
	let length = 0;
	values.forEach((v, i) => {
		length = i > 0 && v === values[i - 1] ? length + 1 : 1;
		if (length > best.length) best = { length, value: v };
	});
	return best;
}

/* ---------------------------------------------------------------- mass balance, B36 */

/** Total of the channels at each time in % of the charge (or of the first complete row). Area % have none. */
export function massBalance(
	ex: Examination,
	points: Point[],
	channels: ChannelContent[],
	unit: TimeUnit
): MassBalance | null {
	const own = balanceChannels(ex, channels);
	if (own === null) return null;
	const rows = points.flatMap((p) => {
		const total = totalOf(p, own);
		return p.time === null || total === null ? [] : [{ row: p.row, time: p.time, ...total }];
	});
	const complete = rows.filter((r) => r.complete);
	const base = baseOf(ex, own[0].unit) ?? complete[0]?.total;
	if (!base || rows.length === 0) return null;
	const percent = (total: number) => Number(((total / base) * 100).toPrecision(8));
	const shown = rows.map((r) => ({
		row: r.row,
		time: r.time,
		percent: percent(r.total),
		complete: r.complete
	}));
	const used = shown.filter((r) => r.complete);
	const line = slopeWithInterval(
		used.map((r) => r.time),
		used.map((r) => r.percent)
	);
	const slope = line && { ...line, unit: `%/${unit}` };
	const span = used.length ? used[used.length - 1].time - used[0].time : 0;
	const mean = used.length ? used.reduce((sum, r) => sum + r.percent, 0) / used.length : NaN;
	if (used.length === 0) return null;
	const balance = { unit: '% of charge', rows: shown, mean, slope, message: balanceWords(mean, slope, unit) };
	noteBalance(ex, balance, span);
	return balance;
}

/** All species seen once each, in one unit; a balance of some of the species is none. */
function balanceChannels(ex: Examination, channels: ChannelContent[]): ChannelContent[] | null {
	if (
		channels.length < 2 ||
		channels.some((c) => c.unit !== channels[0].unit || c.unit === 'area %' || c.unit === 'a.u.')
	)
		return null;
	if (channels.some((c) => c.responseFactor)) return null;
	const seen = new Map<string, number>();
	for (const c of channels)
		for (const [id, w] of Object.entries(c.weights)) seen.set(id, (seen.get(id) ?? 0) + w);
	const counted = ex.species.filter((s) => s.role !== 'reagent in excess');
	return counted.every((s) => seen.get(s.id) === 1) && seen.size === counted.length ? channels : null;
}

/** Values below a limit count as half of it; a row with one missing is not complete. */
function totalOf(p: Point, channels: ChannelContent[]): { total: number; complete: boolean } | null {
	let total = 0;
	let complete = true;
	let any = false;
	for (const c of channels) {
		const v = p.values.get(c.id);
		if (v === undefined || v === null) complete = false;
		else if (typeof v === 'number') total += v;
		else if ('below' in v) total += v.below / 2;
		else complete = false;
		any ||= v != null;
	}
	return any ? { total, complete } : null;
}

function baseOf(ex: Examination, unit: string): number | null {
	if (unit === 'mol/L') return molarCharge(ex);
	const initial = Object.values(ex.mapping.conditions?.initial ?? {});
	if (initial.length === 0 || molarCharge(ex) !== null) return unit === 'fraction of charge' ? 1 : 100;
	if (initial.some((f) => isFitted(f))) return null;
	const total = initial.reduce((sum, f) => sum + (isFitted(f) ? 0 : f.value), 0);
	return unit === 'fraction of charge' ? total / 100 : total;
}

function balanceWords(mean: number, slope: MassBalance['slope'], unit: TimeUnit): string {
	const trend = slope
		? ` It changes by ${signed(slope.value)} % per ${unit} (95 % interval ${signed(slope.low)} to ${signed(slope.high)})${
				slope.low > 0 || slope.high < 0 ? ': a trend' : ': no trend beyond the scatter'
			}.`
		: '';
	return `Mass balance ${mean.toFixed(1)} % of the charge on average; values below a limit count as half of it.${trend}`;
}

const signed = (n: number) => (n < 0 ? '−' : '+') + figure(Math.abs(Number(n.toPrecision(3))));

/** A trend is pointed out where its interval excludes zero and it amounts to at least 0.1 % over the run. */
function noteBalance(ex: Examination, balance: MassBalance, span: number): void {
	const { massBalanceLow: low, massBalanceHigh: high } = ex.checks;
	const outside = balance.rows.filter((r) => r.complete && (r.percent < low || r.percent > high));
	const cell = (r: { row: number }) => address(r.row, ex.mapping.block.firstColumn);
	if (outside.length > 0)
		ex.note({
			rule: 'B36',
			cells: outside.map(cell),
			key: 'rows',
			found: someOf(outside.map((r) => `row ${r.row}: ${r.percent.toFixed(1)} %`)),
			message: `The mass balance lies outside ${low}–${high} % of the charge in ${plural(outside.length, 'row')} (${someOf(outside.map((r) => `row ${r.row}: ${r.percent.toFixed(1)} %`))}).`
		});
	const slope = balance.slope;
	if (slope && (slope.low > 0 || slope.high < 0) && Math.abs(slope.value * span) >= 0.1)
		ex.note({
			rule: 'B36',
			cells: [cell(balance.rows[0])],
			key: 'trend',
			found: `${signed(slope.value)} ${slope.unit}`,
			message: `${balance.message} ${slope.value < 0 ? 'A species that is not seen, or a loss, would look like this.' : 'Evaporation of solvent would look like this.'}`
		});
}

/* ---------------------------------------------------------------- temperature log */

export interface TemperatureLog {
	rows: { time: number; celsius: number; cell: string }[];
	open: boolean;
}

/** The temperature column as a log in °C; values far from its median are pointed out. */
export function temperatureLog(ex: Examination, points: Point[]): TemperatureLog {
	const column = ex.mapping.columns.find((c) => c.role === 'temperature');
	if (!column) return { rows: [], open: false };
	if (column.unit !== 'degC' && column.unit !== 'K') {
		const letter = columnLetter(column.column);
		const taken = ex.ask({
			rule: 'B4',
			level: 'stop',
			cells: [address(ex.mapping.headerRows.at(-1) ?? ex.mapping.block.firstRow, column.column)],
			found: `temperature column ${letter} without a unit`,
			expected: '°C or K',
			message: `Temperature column ${letter} has no unit. Choose one; we will not assume.`,
			options: [
				{ key: 'degC', label: '°C' },
				{ key: 'K', label: 'K' }
			]
		});
		if (!taken) return { rows: [], open: true };
		column.unit = taken.key;
	}
	const shift = column.unit === 'K' ? -273.15 : 0;
	const seen = new Set<number>();
	const rows = points.flatMap((p) => {
		const reading = ex.value(p.row, column.column);
		if (reading.kind !== 'number' || p.time === null || seen.has(p.row)) return [];
		seen.add(p.row);
		return [
			{
				time: p.time,
				celsius: Number((reading.value + shift).toPrecision(12)),
				cell: address(p.row, column.column)
			}
		];
	});
	noteExcursions(ex, rows);
	return { rows, open: false };
}

function noteExcursions(ex: Examination, rows: TemperatureLog['rows']): void {
	if (rows.length < 4) return;
	const middle = median(rows.map((r) => r.celsius));
	const spread = median(rows.map((r) => Math.abs(r.celsius - middle)));
	const limit = Math.max(ex.checks.temperatureK, 6 * spread);
	for (const r of rows.filter((r) => Math.abs(r.celsius - middle) > limit).slice(0, 20))
		ex.note({
			rule: 'A7',
			cells: [r.cell],
			found: `${figure(r.celsius)} °C`,
			expected: `about ${figure(Number(middle.toFixed(1)))} °C`,
			message: `${r.cell}: ${figure(r.celsius)} °C lies ${figure(Number(Math.abs(r.celsius - middle).toFixed(1)))} K from the middle of the log (${figure(Number(middle.toFixed(1)))} °C). An excursion, or a reading error?`
		});
}

/* ---------------------------------------------------------------- plausibility */

/** "Half of A is gone after about 52 min - as seen in the lab?" The sentence that catches a wrong time unit. */
export function plausibility(points: Point[], channels: ChannelContent[], unit: TimeUnit): string[] {
	const timed = points.filter((p) => p.time !== null);
	if (timed.length < 2) return [];
	const last = timed[timed.length - 1].time ?? 0;
	const sentences: string[] = [];
	for (const c of channels) {
		const own = timed.flatMap((p) => {
			const v = p.values.get(c.id);
			return typeof v === 'number' ? [{ t: p.time ?? 0, v }] : [];
		});
		if (own.length < 2 || !(own[0].v > 0) || own[0].v !== Math.max(...own.map((o) => o.v))) continue;
		sentences.push(halfSentence(c.label ?? c.id, own, unit));
		break;
	}
	sentences.push(`The last sample was taken after ${durationWords(last, unit)}.`);
	return sentences;
}

function halfSentence(name: string, own: { t: number; v: number }[], unit: TimeUnit): string {
	const half = own[0].v / 2;
	const at = own.findIndex((o) => o.v <= half);
	if (at < 0) {
		const end = own[own.length - 1];
		return `${Math.round((end.v / own[0].v) * 100)} % of ${name} is left after ${durationWords(end.t, unit)} – as seen in the lab?`;
	}
	const [a, b] = [own[at - 1], own[at]];
	const t = a.t + ((a.v - half) / (a.v - b.v || 1)) * (b.t - a.t);
	return `Half of ${name} is gone after about ${durationWords(t, unit)} – as seen in the lab?`;
}

/** "52 min", "1.5 h", "3 d": two or three digits in the unit that reads best. */
export function durationWords(value: number, unit: TimeUnit): string {
	const seconds = value * { s: 1, min: 60, h: 3600, d: 86_400 }[unit];
	const size = Math.abs(seconds);
	const [factor, name] =
		size < 120 ? [1, 's'] : size < 7200 ? [60, 'min'] : size < 172_800 ? [3600, 'h'] : [86_400, 'd'];
	return `${Number((seconds / factor).toPrecision(3))} ${name}`;
}

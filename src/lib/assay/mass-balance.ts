/** B36: the total at each time in % of the charge, its trend with interval, and the rows outside the limits. */
import { isFitted } from '$lib/schemas/quantity';
import type { ChannelContent } from '$lib/schemas/run';
import type { MassBalance, TimeUnit } from '$lib/schemas/sheet';
import { molarCharge } from './charge';
import type { Examination } from './examination';
import { figure, plural, someOf } from './wording';
import { slopeWithInterval } from './statistics';
import type { Point } from './timepoints';

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
	const cell = (r: { row: number }) => ex.at(r.row, ex.mapping.block.firstColumn);
	if (outside.length > 0)
		ex.note({
			rule: 'B36',
			cells: outside.map(cell),
			key: 'rows',
			found: someOf(outside.map((r) => `row ${r.row}: ${r.percent.toFixed(1)} %`)),
			expected: `${low} to ${high} % of the charge`,
			message: `The mass balance lies outside ${low}–${high} % of the charge in ${plural(outside.length, 'row')} (${someOf(outside.map((r) => `row ${r.row}: ${r.percent.toFixed(1)} %`))}).`
		});
	const slope = balance.slope;
	if (slope && (slope.low > 0 || slope.high < 0) && Math.abs(slope.value * span) >= 0.1)
		ex.note({
			rule: 'B36',
			cells: [cell(balance.rows[0])],
			key: 'trend',
			found: `${signed(slope.value)} ${slope.unit}`,
			expected: 'no trend beyond the scatter',
			message: `${balance.message} ${slope.value < 0 ? 'A species that is not seen, or a loss, would look like this.' : 'Evaporation of solvent would look like this.'}`
		});
}

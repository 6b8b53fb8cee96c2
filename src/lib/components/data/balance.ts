/** Mass balance of a run: the sum of what is assayed, in % of the charge, where such a sum means anything. */
import { isFitted } from '$lib/schemas/quantity';
import type { RunContent } from '$lib/schemas/run';
import { slopeWithInterval, type Slope } from '$lib/assay/statistics';
import { toSi, UnitError } from '$lib/kinetics/units';

export interface BalanceRow {
	index: number;
	time: number;
	percent: number;
}

export interface Balance {
	rows: BalanceRow[];
	lowest: number;
	highest: number;
	/** What counts as 100 %. */
	basis: string;
}

/** Area % always sum to 100 and say nothing; a signal without a known response is no amount. */
const isAmount = (unit: string): boolean => !/area|a\.u\.|signal/i.test(unit);

function chargeIn(content: RunContent, unit: string): number | null {
	let total = 0;
	for (const amount of Object.values(content.initial)) {
		if (isFitted(amount)) return null;
		try {
			total += toSi(amount, 'concentration') / toSi({ value: 1, unit }, 'concentration');
		} catch (error) {
			if (error instanceof UnitError) return null;
			throw error;
		}
	}
	return total > 0 ? total : null;
}

function totalAt(content: RunContent, index: number): number | null {
	let total = 0;
	for (const channel of content.channels) {
		const value = content.timepoints[index].values[channel.id] ?? null;
		if (value === null || (typeof value === 'object' && 'above' in value)) return null;
		// A value below its limit lies somewhere between zero and the limit.
		total += typeof value === 'number' ? value : value.below / 2;
	}
	return total;
}

/** Null where the columns do not add up to anything: mixed units, area %, co-eluting or scaled signals. */
export function balanceOf(content: RunContent): Balance | null {
	const { channels, timepoints } = content;
	const unit = channels[0]?.unit ?? '';
	const sums =
		channels.length >= 2 &&
		isAmount(unit) &&
		channels.every((c) => c.unit === unit && !c.responseFactor && Object.keys(c.weights).length === 1);
	if (!sums) return null;
	const totals = timepoints.flatMap((point, index) => {
		const total = totalAt(content, index);
		return total === null ? [] : [{ index, time: point.time, total }];
	});
	const charge = chargeIn(content, unit);
	const base = charge ?? totals[0]?.total;
	if (!base || totals.length === 0) return null;
	const rows = totals.map(({ index, time, total }) => ({ index, time, percent: (100 * total) / base }));
	const percents = rows.map((row) => row.percent);
	return {
		rows,
		lowest: Math.min(...percents),
		highest: Math.max(...percents),
		basis: charge === null ? 'the first complete row' : 'the charge'
	};
}

export interface BalanceTrend {
	/** % per time unit, with its 95 % interval. */
	slope: Slope;
	line: { x: [number, number]; y: [number, number] };
}

/** Straight line through the balance by least squares; null below three rows or at one single time. */
export function balanceTrend(balance: Balance): BalanceTrend | null {
	const x = balance.rows.map((row) => row.time);
	const y = balance.rows.map((row) => row.percent);
	const slope = slopeWithInterval(x, y);
	if (!slope) return null;
	const mean = (list: number[]) => list.reduce((sum, v) => sum + v, 0) / list.length;
	const [mx, my] = [mean(x), mean(y)];
	const ends: [number, number] = [Math.min(...x), Math.max(...x)];
	const at = (t: number) => my + slope.value * (t - mx);
	return { slope, line: { x: ends, y: [at(ends[0]), at(ends[1])] } };
}

const signed = (n: number): string => `${n < 0 ? '−' : '+'}${Math.abs(Number(n.toPrecision(3)))}`;

export function trendWords(trend: BalanceTrend | null, timeUnit: string): string {
	if (!trend) return 'Too few complete rows for a trend.';
	const { value, low, high } = trend.slope;
	const range = `${signed(value)} % per ${timeUnit} (95 % interval ${signed(low)} to ${signed(high)})`;
	if (low <= 0 && high >= 0) return `It changes by ${range}: no trend beyond the scatter.`;
	const cause =
		value < 0
			? 'A species that is not seen, or a loss, would look like this.'
			: 'Evaporation of solvent would look like this.';
	return `It changes by ${range}: a trend. ${cause}`;
}

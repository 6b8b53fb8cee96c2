/** Mass balance of a run: the sum of what is assayed, in % of the charge, where such a sum means anything. */
import { isFitted } from '$lib/schemas/quantity';
import type { RunContent } from '$lib/schemas/run';
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

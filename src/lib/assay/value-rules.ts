/** The values: each cell of each channel is settled in its column's unit, one rule after the other. */
import type { AssayValue } from '$lib/schemas/run';
import { askUnits, settlePercent } from './cell-units';
import type { Channel } from './channels';
import { askDense } from './dense-values';
import type { Examination } from './examination';
import { askAbove, askLimits, askNotDetected, askTrace } from './limit-rules';
import type { StatedLimits } from './limits';
import { settleZerosAndNegatives } from './low-values';
import { askMarked } from './marked-values';
import { askMergedValues } from './merged-values';
import type { Sample } from './samples';
import { askShareScale } from './share-scale';
import { leaveMissing, type Spot } from './spots';
import { unitColumn, withOwnUnit } from './unit-column';
import { askTexts, stopUnusable } from './unusable-cells';
import { noteFormulas, noteMissing, noteTextNumbers } from './value-notes';

/** Values by sample and channel; a spot that is not settled is not in the map. */
export type Values = Map<Sample, Map<string, AssayValue>>;

export function settleValues(
	ex: Examination,
	samples: Sample[],
	channels: Channel[],
	limits: StatedLimits,
	/** Cells left as missing because the sheet marks them. */
	leftOut: Set<string>
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
	leaveMarked(
		ex,
		spots.flatMap((s) => s.spots),
		leftOut
	);
	askMarked(ex, spots);
	askShareScale(ex, spots);
	for (const { channel, spots: own } of spots) {
		askMergedValues(ex, channel, own);
		stopUnusable(ex, channel, own);
		askTexts(ex, channel, own);
		askUnits(ex, channel, own);
		settlePercent(ex, channel, own);
		askDense(ex, channel, own);
		askLimits(ex, channel, own, limits);
		askAbove(ex, channel, own);
	}
	askNotDetected(ex, spots, limits);
	for (const { channel, spots: own } of spots) {
		askTrace(ex, channel, own, limits);
		settleZerosAndNegatives(ex, channel, own, limits);
		noteMissing(ex, channel, own);
	}
	return values;
}

function leaveMarked(ex: Examination, spots: Spot[], leftOut: Set<string>): void {
	const own = spots.filter((s) => leftOut.has(s.cell));
	if (own.length > 0) leaveMissing(ex, own, 'coloured or struck through on the sheet');
}

function spotsOf(ex: Examination, samples: Sample[], channel: Channel, values: Values): Spot[] {
	const units = unitColumn(ex.view, ex.mapping);
	return samples.flatMap((sample) => {
		const place = sample.cells.get(channel.id);
		if (!place) return [];
		const cell = ex.at(place.row, place.column);
		const spot: Spot = {
			sample,
			row: place.row,
			column: place.column,
			cell,
			reading: withOwnUnit(ex, ex.value(place.row, place.column), place.row, units, channel.unit),
			set: (value) => void values.get(sample)?.set(channel.id, value)
		};
		return [spot];
	});
}

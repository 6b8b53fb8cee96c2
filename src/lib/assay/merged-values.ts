/** B31: a value merged over several cells is stored in the first alone. Whether it holds for the others is asked. */
import type { CellReading } from './cells';
import { type Channel, channelName } from './channels';
import type { Examination } from './examination';
import { askSpots, cellsOf, letter, ofKind, type Spot } from './spots';
import { someOf } from './wording';

interface Covered {
	spot: Spot;
	/** What the first cell of the merged area holds. */
	reading: CellReading;
	shown: string;
}

export function askMergedValues(ex: Examination, channel: Channel, spots: Spot[]): void {
	const covered = ofKind(spots, 'blank').flatMap((spot): Covered[] => {
		const area = ex.view.mergeAt(spot.row, spot.column);
		if (!area || ex.isCorrected(spot.row, spot.column)) return [];
		const reading = ex.value(area[0], area[1]);
		return reading.kind === 'blank' ? [] : [{ spot, reading, shown: ex.shown(area[0], area[1]) }];
	});
	if (covered.length === 0) return;
	const own = covered.map((c) => c.spot);
	const one = own.length === 1;
	const taken = askSpots(
		ex,
		own,
		{
			rule: 'B31',
			level: 'ask',
			key: `${letter(channel, own)}-merged`,
			found: `a merged cell, "${covered[0].shown.slice(0, 40)}"`,
			expected: 'a value in each cell',
			message: `${channelName(channel)}: ${someOf(cellsOf(own))} ${one ? 'is part of a merged cell' : 'are parts of merged cells'} ("${covered[0].shown.slice(0, 40)}"). Does its value hold there too, or is ${one ? 'it' : 'each'} missing?`
		},
		[{ key: 'same', label: 'The value of the merged cell holds there too' }]
	);
	if (taken?.key !== 'same') return;
	for (const { spot, reading } of covered) spot.reading = structuredClone(reading);
	ex.conversions.push(`${someOf(cellsOf(own), 8)}: value of the merged cell taken there too.`);
}

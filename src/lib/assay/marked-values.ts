/** Values with a mark (B11): approximate, with a spread, in brackets, with a footnote. Each kind of mark is asked once for the table. */
import type { CellReading } from './cells';
import type { Channel } from './channels';
import type { Examination } from './examination';
import type { MarkKind } from './marks';
import { askSpots, cellsOf, ofKind, type Spot } from './spots';
import { because, plural, someOf } from './wording';

type Marked = Spot & { reading: Extract<CellReading, { kind: 'marked' }> };

const SAYS: Record<MarkKind, { what: (sign: string) => string; record: string }> = {
	about: { what: () => 'an approximate value', record: 'an approximate value' },
	spread: {
		what: () => 'a value with its spread. The spread goes on the record and is not used as a weight',
		record: 'its spread stands on the record and was not used as a weight'
	},
	note: { what: (sign) => `a value with the mark "${sign}"`, record: 'the mark stands on the record' },
	brackets: {
		what: () => 'a value in brackets, as doubtful or negative values are written',
		record: 'brackets taken off'
	}
};

export function askMarked(ex: Examination, all: { channel: Channel; spots: Spot[] }[]): void {
	const groups = new Map<string, Marked[]>();
	for (const { spots } of all)
		for (const s of ofKind(spots, 'marked')) {
			const { kind, sign } = s.reading.mark;
			const key = kind === 'note' ? `note-${sign}` : kind;
			groups.set(key, [...(groups.get(key) ?? []), s]);
		}
	for (const [key, same] of groups) askGroup(ex, key, same);
}

function askGroup(ex: Examination, key: string, same: Marked[]): void {
	const [{ reading }] = same;
	const { mark, text } = reading;
	const one = same.length === 1;
	const says = SAYS[mark.kind];
	const taken = askSpots(
		ex,
		same,
		{
			rule: 'B11',
			level: 'ask',
			key: `marked-${key}`.slice(0, 80),
			found: `"${text}"${one ? '' : ` and ${plural(same.length - 1, 'value')} like it`}`,
			expected: 'a plain number, a limit, or nothing',
			message: `"${text}" in ${someOf(cellsOf(same))}: ${says.what(mark.sign)}. Read ${mark.core}, or leave ${one ? 'it' : 'them'} as missing?`
		},
		[{ key: 'number', label: one ? `Read ${mark.core}` : `Read the numbers, such as ${mark.core}` }]
	);
	if (taken?.key !== 'number') return;
	for (const s of same) (s as Spot).reading = s.reading.inner;
	ex.conversions.push(
		`${someOf(cellsOf(same), 8)}: "${text}" read as ${mark.core}; ${says.record}${because(taken.reason)}.`
	);
}

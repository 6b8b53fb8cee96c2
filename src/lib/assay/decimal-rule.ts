/** B6: one decimal sign for the whole file, told by its cells or asked once. */
import type { FindingOption } from '$lib/schemas/sheet';
import { numberPart } from './cells';
import type { Examination } from './examination';
import { figure, someOf } from './wording';
import { address } from './grid';
import { decide, type DecimalVotes, noVotes, vote } from './numbers';

/** B6: one decimal convention for the whole file. */
export function settleDecimal(ex: Examination, votes: DecimalVotes): void {
	if (ex.decimal) return;
	const { decimal, trouble } = decide(votes);
	if (!trouble) {
		ex.decimal = decimal;
		ex.mapping.decimal = decimal;
		return;
	}
	const taken = trouble === 'ambiguous' ? askAmbiguous(ex, votes) : stopMixed(ex, votes);
	if (!taken) return;
	ex.decimal = taken;
	ex.mapping.decimal = taken;
	ex.conversions.push(`Numbers written as text: "${taken}" read as the decimal sign throughout the file.`);
}

function askAmbiguous(ex: Examination, votes: DecimalVotes): '.' | ',' | null {
	const first = votes.ambiguous[0];
	const taken = ex.ask({
		rule: 'B6',
		level: 'ask',
		cells: votes.ambiguous.map((a) => cellOf(a.where)),
		key: 'decimal',
		found: `"${first.text}" in ${cellOf(first.where)}`,
		expected: 'one decimal sign for the file',
		message: `"${first.text}" could be ${figure(first.point)} or ${figure(first.comma)}. Nothing else in the file tells which.`,
		options: [
			{ key: 'point', label: `"." is the decimal sign: ${figure(first.point)}` },
			{ key: 'comma', label: `"," is the decimal sign: ${figure(first.comma)}` }
		]
	});
	return taken ? (taken.key === 'comma' ? ',' : '.') : null;
}

function stopMixed(ex: Examination, votes: DecimalVotes): '.' | ',' | null {
	const options: FindingOption[] = [
		{
			key: 'point',
			label: `"." is the decimal sign; ${askedThen(votes.counts.comma)}`
		},
		{
			key: 'comma',
			label: `"," is the decimal sign; ${askedThen(votes.counts.point)}`
		}
	];
	const taken = ex.ask({
		rule: 'B6',
		level: 'stop',
		cells: [...votes.point, ...votes.comma].map(cellOf),
		key: 'decimal',
		found: `decimal points (${someOf(votes.point.map(cellOf))}) and decimal commas (${someOf(votes.comma.map(cellOf))})`,
		expected: 'one decimal sign for the file',
		message: `The file mixes decimal points (${someOf(votes.point.map(cellOf))}) and decimal commas (${someOf(votes.comma.map(cellOf))}). Say which one counts.`,
		options
	});
	return taken ? (taken.key === 'comma' ? ',' : '.') : null;
}

const cellOf = (where: string) => where.slice(where.lastIndexOf('!') + 1);

/** Votes of all text cells inside the blocks of a file. */
export function countVotes(
	workbook: Examination['workbook'],
	blocks: {
		sheet: string;
		block: { firstRow: number; lastRow: number; firstColumn: number; lastColumn: number };
	}[]
): DecimalVotes {
	const votes = noVotes();
	for (const { sheet, block } of blocks) {
		const found = workbook.sheets.find((s) => s.name === sheet);
		for (const row of found?.rows ?? []) {
			if (row.r < block.firstRow || row.r > block.lastRow) continue;
			for (const cell of row.c)
				if (
					typeof cell[1] === 'string' &&
					cell[0] >= block.firstColumn &&
					cell[0] <= block.lastColumn &&
					cell[1].length < 60
				)
					voteCell(votes, cell[1], sheet, row.r, cell[0]);
		}
	}
	return votes;
}

/** A text without a separator says nothing; most texts of a table are like that or plain. */
function voteCell(votes: DecimalVotes, text: string, sheet: string, row: number, column: number): void {
	if (!text.includes('.') && !text.includes(',')) return;
	vote(votes, numberPart(text), `${sheet}!${address(row, column)}`);
}

const askedThen = (others: number): string =>
	others === 1 ? 'the other number is then asked about' : `the ${others} others are then asked one by one`;

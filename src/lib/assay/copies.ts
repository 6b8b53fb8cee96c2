/** B35: columns and cells that look copied. */
import { type Channel, channelName } from './channels';
import type { Examination } from './examination';
import { figure, plural } from './wording';
import type { Point } from './timepoints';

/** B35: columns that look copied. */
export function noteCopies(ex: Examination, points: Point[], channels: Channel[]): void {
	const series = channels.map((c) =>
		points.map((p) => p.values.get(c.id)).filter((v) => typeof v === 'number')
	);
	channels.forEach((c, i) => {
		const own = series[i];
		const cells = [ex.at(ex.mapping.block.firstRow, c.column)];
		const run = longestRun(own);
		if (own.length >= 4 && own.every((v) => v === own[0]))
			ex.note({
				rule: 'B35',
				cells,
				key: `same-${c.id}`,
				found: `${plural(own.length, 'identical value')}`,
				expected: 'values that change with time',
				message: `All values of ${channelName(c)} are ${figure(own[0])}. A copied column?`
			});
		else if (run.length > 15 && run.value !== 0)
			ex.note({
				rule: 'B35',
				cells,
				key: `run-${c.id}`,
				found: `${run.length} times ${figure(run.value)}`,
				expected: 'values that change with time',
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
					cells: [...cells, ex.at(ex.mapping.block.firstRow, channels[j].column)],
					key: `pair-${c.id}-${channels[j].id}`,
					found: 'two identical columns',
					expected: 'columns of their own',
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

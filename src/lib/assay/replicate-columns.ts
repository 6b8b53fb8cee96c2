/** Several columns of one species that are its replicates (B13): asked once for all of them, kept apart or averaged row by row. */
import type { AssayValue } from '$lib/schemas/run';
import type { ColumnMapping } from '$lib/schemas/sheet';
import { type Channel, headerCell, nameOf } from './channels';
import type { Examination } from './examination';
import { averageOf, type Point } from './timepoints';
import { capital, figure, someOf } from './wording';

export type ReplicateKind = 'samples' | 'injections';

/** Null while that is open; 'first' when only the first column of each species counts. */
export function askReplicateColumns(
	ex: Examination,
	groups: ColumnMapping[][]
): ReplicateKind | 'first' | null {
	if (groups.length === 0) return null;
	if (ex.mapping.columnReplicates) return ex.mapping.columnReplicates;
	const { places } = ex;
	const names = groups.map(
		(same) => `${places.manySeries(same.map((c) => c.column))} for ${nameOf(same[0].weights ?? {})}`
	);
	const taken = ex.ask({
		rule: 'B13',
		level: 'ask',
		cells: groups.flatMap((same) => same.map((c) => headerCell(ex, c.column))),
		key: 'columns',
		found: `replicates side by side: ${someOf(names)}`,
		expected: 'injections of one sample, or separate samples',
		message: `${capital(someOf(names))}: the headers number them as replicates. Injections of one sample, or separate samples?`,
		options: [
			{ key: 'injections', label: 'Injections of one sample: average them' },
			{ key: 'samples', label: 'Separate samples: keep each' },
			{ key: 'first', label: 'Use only the first of each' }
		]
	});
	const key = (taken?.key ?? null) as ReplicateKind | 'first' | null;
	if (key === 'injections' || key === 'samples') ex.mapping.columnReplicates = key;
	return key;
}

/** Injections beside each other become one value in each row; their scatter goes on the record as injection precision. */
export function averageColumns(ex: Examination, points: Point[], channels: Channel[]): Point[] {
	const own = channels.filter((c) => c.replicateKind === 'injections' && c.replicates.length > 0);
	if (own.length === 0) return points;
	const byRow = new Map<number, Point[]>();
	for (const p of points) byRow.set(p.row, [...(byRow.get(p.row) ?? []), p]);
	for (const channel of own) {
		const variances: number[] = [];
		for (const same of byRow.values()) averageRow(same, channel.id, variances);
		const pooled = variances.length
			? `; standard deviation of injection ${figure(Math.sqrt(variances.reduce((a, b) => a + b, 0) / variances.length))}`
			: '';
		ex.conversions.push(
			`${channel.label}: ${ex.places.manySeries([channel.column, ...channel.replicates])} averaged as injections of one sample${pooled}.`
		);
	}
	return points.filter((p) => p.sample.replicate === 0 || p.cells.size > 0);
}

function averageRow(same: Point[], id: string, variances: number[]): void {
	const holders = same.filter((p) => p.cells.has(id));
	const [first, ...others] = holders;
	if (!first || others.length === 0) return;
	const values: AssayValue[] = holders.flatMap((p) => {
		const v = p.values.get(id);
		return v === undefined ? [] : [v];
	});
	first.unsettled ||= others.some((p) => p.unsettled);
	// While a cell is open the row stays open too.
	if (values.length < holders.length) first.values.delete(id);
	else {
		const { value, spread } = averageOf(values);
		first.values.set(id, value);
		if (spread !== null) variances.push(spread ** 2);
	}
	for (const p of others) {
		p.cells.delete(id);
		p.values.delete(id);
	}
}

/** Several columns for one species: two quantities are never merged (B3), two columns of one quantity are replicates or a mistake (B32). */
import type { ColumnMapping } from '$lib/schemas/sheet';
import { headerCell, nameOf } from './channels';
import type { ColumnHeader } from './columns';
import { type Examination, someOf } from './examination';
import { columnLetter } from './grid';

interface Doubles {
	absorbed: Set<number>;
	of: Map<number, number[]>;
}

export function settleDoubles(
	ex: Examination,
	columns: ColumnMapping[],
	headers: Map<number, ColumnHeader>
): Doubles {
	const groups = quantityGroups(columns, headers);
	if (groups.length > 1 && sharesSpecies(groups)) askQuantity(ex, groups);
	const doubles: Doubles = { absorbed: new Set(), of: new Map() };
	const bySpecies = new Map<string, ColumnMapping[]>();
	for (const c of columns.filter((c) => c.role === 'species')) {
		const key = `${quantityOf(c, headers)}|${JSON.stringify(Object.entries(c.weights ?? {}).sort())}`;
		bySpecies.set(key, [...(bySpecies.get(key) ?? []), c]);
	}
	for (const same of bySpecies.values()) if (same.length > 1) stopDouble(ex, same, doubles);
	return doubles;
}

interface QuantityGroup {
	key: string;
	columns: ColumnMapping[];
}

function quantityOf(c: ColumnMapping, headers: Map<number, ColumnHeader>): string {
	return c.unit ?? headers.get(c.column)?.group ?? '';
}

function quantityGroups(columns: ColumnMapping[], headers: Map<number, ColumnHeader>): QuantityGroup[] {
	const groups = new Map<string, ColumnMapping[]>();
	for (const c of columns) {
		const key = quantityOf(c, headers);
		groups.set(key, [...(groups.get(key) ?? []), c]);
	}
	return [...groups].map(([key, columns]) => ({ key, columns }));
}

function sharesSpecies(groups: QuantityGroup[]): boolean {
	const seen = new Set<string>();
	for (const { columns } of groups) {
		const own = new Set(columns.map((c) => nameOf(c.weights ?? {})));
		for (const name of own) if (seen.has(name)) return true;
		own.forEach((name) => seen.add(name));
	}
	return false;
}

const lettersOf = (columns: ColumnMapping[]): string => {
	const numbers = columns.map((c) => c.column);
	const run = numbers.length > 1 && numbers[numbers.length - 1] - numbers[0] === numbers.length - 1;
	return run
		? `${columnLetter(numbers[0])}–${columnLetter(numbers[numbers.length - 1])}`
		: someOf(numbers.map(columnLetter), 8);
};

const columnsAre = (g: QuantityGroup) =>
	`${g.columns.length === 1 ? 'column' : 'columns'} ${lettersOf(g.columns)}`;

const quantityName = (g: QuantityGroup) => g.key || 'without a unit';

function askQuantity(ex: Examination, groups: QuantityGroup[]): void {
	const what = groups
		.map((g) => `${columnsAre(g)} ${g.columns.length === 1 ? 'is' : 'are'} ${quantityName(g)}`)
		.join(', ');
	const taken = ex.ask({
		rule: 'B3',
		level: 'ask',
		cells: groups.flatMap((g) => g.columns.map((c) => headerCell(ex, c.column))),
		key: 'quantities',
		found: what,
		expected: 'one quantity to be fitted; quantities are never merged',
		message: `${what[0].toUpperCase()}${what.slice(1)}. Which should be fitted?`,
		options: groups.map((g) => ({
			key: `use:${g.key}`.slice(0, 60),
			label: `${quantityName(g)} (${columnsAre(g)})`
		}))
	});
	if (!taken) return;
	for (const g of groups) {
		if (`use:${g.key}`.slice(0, 60) === taken.key) continue;
		for (const c of g.columns) c.role = 'ignore';
		ex.conversions.push(
			`${columnsAre(g)} (${quantityName(g)}) kept for reference, not fitted.`.replace(/^c/, 'C')
		);
	}
}

function stopDouble(ex: Examination, same: ColumnMapping[], doubles: Doubles): void {
	const name = nameOf(same[0].weights ?? {});
	const letters = same.map((c) => columnLetter(c.column));
	const taken = ex.ask({
		rule: 'B32',
		level: 'stop',
		cells: same.map((c) => headerCell(ex, c.column)),
		key: `double-${letters.join('-')}`.slice(0, 80),
		found: `columns ${letters.join(', ')} all read as ${name}`,
		expected: 'one column for each species',
		message: `Columns ${letters.join(' and ')} are both ${name}. Replicate samples, or is one of them something else?`,
		options: [
			{ key: 'replicates', label: 'Replicate samples: use them all' },
			...letters.map((letter) => ({ key: `use:${letter}`, label: `Use column ${letter} only` }))
		]
	});
	if (!taken) return;
	if (taken.key === 'replicates') {
		for (const c of same.slice(1)) doubles.absorbed.add(c.column);
		doubles.of.set(
			same[0].column,
			same.slice(1).map((c) => c.column)
		);
		ex.conversions.push(`Columns ${letters.join(', ')} read as replicate samples of ${name}.`);
		return;
	}
	for (const c of same) if (`use:${columnLetter(c.column)}` !== taken.key) c.role = 'ignore';
	ex.conversions.push(`Of columns ${letters.join(', ')} for ${name}, only ${taken.key.slice(4)} used.`);
}

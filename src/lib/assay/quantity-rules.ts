/** Several columns for one species: two quantities are never merged (B3), two columns of one quantity are replicates (B13) or a mistake (B32). */
import type { ColumnMapping } from '$lib/schemas/sheet';
import { headerCell, nameOf } from './channels';
import type { ColumnHeader } from './columns';
import type { Examination } from './examination';
import { type ReplicateKind, askReplicateColumns } from './replicate-columns';
import { areReplicates } from './replicate-headers';
import { capital } from './wording';

interface Doubles {
	absorbed: Set<number>;
	of: Map<number, { columns: number[]; kind: ReplicateKind }>;
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
	const several = [...bySpecies.values()].filter((same) => same.length > 1);
	const numbered = several.filter((same) =>
		areReplicates(
			same.map((c) => headers.get(c.column)),
			ex.species
		)
	);
	const kind = askReplicateColumns(ex, numbered);
	for (const same of numbered) useNumbered(ex, same, kind, doubles);
	for (const same of several) if (!numbered.includes(same)) stopDouble(ex, same, doubles);
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

const columnsAre = (ex: Examination, g: QuantityGroup) =>
	ex.places.manySeries(g.columns.map((c) => c.column));

const quantityName = (g: QuantityGroup) => g.key || 'without a unit';

function askQuantity(ex: Examination, groups: QuantityGroup[]): void {
	const what = groups
		.map((g) => `${columnsAre(ex, g)} ${g.columns.length === 1 ? 'is' : 'are'} ${quantityName(g)}`)
		.join(', ');
	const taken = ex.ask({
		rule: 'B3',
		level: 'ask',
		cells: groups.flatMap((g) => g.columns.map((c) => headerCell(ex, c.column))),
		key: 'quantities',
		found: what,
		expected: 'one quantity to be fitted; quantities are never merged',
		message: `${capital(what)}. Which should be fitted?`,
		options: groups.map((g) => ({
			key: `use:${g.key}`.slice(0, 60),
			label: `${quantityName(g)} (${columnsAre(ex, g)})`
		}))
	});
	if (!taken) return;
	for (const g of groups) {
		if (`use:${g.key}`.slice(0, 60) === taken.key) continue;
		for (const c of g.columns) c.role = 'ignore';
		ex.conversions.push(capital(`${columnsAre(ex, g)} (${quantityName(g)}) kept for reference, not fitted.`));
	}
}

/** While it is open the first column stands for all, so that nothing is counted twice. */
function useNumbered(
	ex: Examination,
	same: ColumnMapping[],
	kind: ReplicateKind | 'first' | null,
	doubles: Doubles
): void {
	if (kind !== 'first') return together(ex, same, kind ?? 'samples', doubles);
	for (const c of same.slice(1)) c.role = 'ignore';
	ex.conversions.push(
		`Of ${ex.places.manySeries(same.map((c) => c.column))} for ${nameOf(same[0].weights ?? {})}, only the first used.`
	);
}

function together(ex: Examination, same: ColumnMapping[], kind: ReplicateKind, doubles: Doubles): void {
	const columns = same.slice(1).map((c) => c.column);
	for (const column of columns) doubles.absorbed.add(column);
	doubles.of.set(same[0].column, { columns, kind });
	if (kind === 'samples')
		ex.conversions.push(
			`${capital(ex.places.manySeries(same.map((c) => c.column)))} read as replicate samples of ${nameOf(same[0].weights ?? {})}.`
		);
}

function stopDouble(ex: Examination, same: ColumnMapping[], doubles: Doubles): void {
	const name = nameOf(same[0].weights ?? {});
	const letters = same.map((c) => ex.places.mark(c.column));
	const columns = ex.places.manySeries(same.map((c) => c.column));
	const taken = ex.ask({
		rule: 'B32',
		level: 'stop',
		cells: same.map((c) => headerCell(ex, c.column)),
		key: `double-${letters.join('-')}`.slice(0, 80),
		found: `${columns} ${same.length === 2 ? 'both' : 'all'} read as ${name}`,
		expected: `one ${ex.places.across ? 'row' : 'column'} for each species, or replicates`,
		message: `${capital(columns)} are ${same.length === 2 ? 'both' : 'all'} ${name}. Replicates, or is one of them something else?`,
		options: [
			{ key: 'replicates', label: 'Replicate samples: use them all' },
			{ key: 'injections', label: 'Injections of one sample: average them' },
			...same.map((c) => ({
				key: `use:${ex.places.mark(c.column)}`,
				label: `Use ${ex.places.series(c.column)} only`
			}))
		]
	});
	if (!taken) return;
	if (taken.key === 'replicates') return together(ex, same, 'samples', doubles);
	if (taken.key === 'injections') return together(ex, same, 'injections', doubles);
	for (const c of same) if (`use:${ex.places.mark(c.column)}` !== taken.key) c.role = 'ignore';
	ex.conversions.push(`Of ${columns} for ${name}, only ${taken.key.slice(4)} used.`);
}

/** Rules about columns: which species (B32), which quantity (B3), which unit (B4). Gives the channels that are read. */
import {
	VALUE_UNITS,
	type ColumnMapping,
	type FindingOption,
	type PeakMapping,
	type ValueUnit
} from '$lib/schemas/sheet';
import type { ColumnHeader } from './columns';
import { plural, someOf, type Examination, type Taken } from './examination';
import { address, columnLetter } from './grid';

/** One series of values of the run to be. */
export interface Channel {
	id: string;
	weights: Record<string, number>;
	unit: ValueUnit | null;
	/** Column of the values; in the long layout the value column, with the peak's name. */
	column: number;
	peak?: string;
	/** Further columns that are replicate samples of the same channel. */
	replicates: number[];
	loq: number | null;
	lod: number | null;
	responseFactor: number | null;
	fitResponse: boolean;
	label: string;
	mapping: ColumnMapping | PeakMapping;
}

/** How a message names a channel: "A (column E)". */
export const channelName = (c: Channel): string =>
	c.peak === undefined ? `${c.label} (column ${columnLetter(c.column)})` : `${c.label} (peak "${c.peak}")`;

/** Part of a finding's id: the column or the peak, which other answers do not change. */
export const channelKey = (c: Channel): string =>
	c.peak === undefined ? columnLetter(c.column) : `peak-${c.peak}`.slice(0, 120);

/** Where a question about the whole column points: its header cell. */
export function headerCell(ex: Examination, column: number): string {
	const rows = ex.mapping.headerRows;
	return address(rows.length > 0 ? rows[rows.length - 1] : ex.mapping.block.firstRow, column);
}

export function settleChannels(ex: Examination, headers: Map<number, ColumnHeader>): Channel[] {
	return ex.mapping.layout === 'long' ? peakChannels(ex, headers) : wideChannels(ex, headers);
}

function wideChannels(ex: Examination, headers: Map<number, ColumnHeader>): Channel[] {
	const columns = ex.mapping.columns.filter((c) => c.role === 'species');
	for (const c of columns) if (!hasSpecies(c.weights)) askSpecies(ex, c, headers.get(c.column)?.header ?? '');
	const matched = columns.filter((c) => c.role === 'species' && hasSpecies(c.weights));
	const replicates = settleDoubles(ex, matched, headers);
	const ids = new Set<string>();
	return matched
		.filter((c) => c.role === 'species' && !replicates.absorbed.has(c.column))
		.map((c) => {
			askUnit(ex, c, headers.get(c.column), headerCell(ex, c.column));
			return channelOf(c, c.column, uniqueId(c.weights ?? {}, ids), replicates.of.get(c.column) ?? []);
		});
}

function channelOf(c: ColumnMapping, column: number, id: string, replicates: number[]): Channel {
	return {
		id,
		weights: c.weights ?? {},
		unit: asUnit(c.unit),
		column,
		replicates,
		loq: c.loq ?? null,
		lod: c.lod ?? null,
		responseFactor: c.responseFactor ?? null,
		fitResponse: c.fitResponse ?? false,
		label: nameOf(c.weights ?? {}),
		mapping: c
	};
}

const asUnit = (unit: string | null): ValueUnit | null =>
	VALUE_UNITS.includes(unit as ValueUnit) ? (unit as ValueUnit) : null;
const hasSpecies = (weights: Record<string, number> | undefined) => Object.keys(weights ?? {}).length > 0;
export const nameOf = (weights: Record<string, number>): string => Object.keys(weights).join(' + ');

function uniqueId(weights: Record<string, number>, taken: Set<string>): string {
	const base = Object.keys(weights).join('_').slice(0, 34) || 'channel';
	let id = base;
	for (let n = 2; taken.has(id); n++) id = `${base}-${n}`;
	taken.add(id);
	return id;
}

/* ---------------------------------------------------------------- species, B32 */

function speciesOptions(ex: Examination): FindingOption[] {
	const choices = ex.species.map((s) => ({
		key: s.id,
		label: s.name && s.name !== s.id ? `${s.id} (${s.name})` : s.id
	}));
	const options: FindingOption[] = [{ key: 'ignore', label: 'Do not use it' }];
	if (choices.length > 0) {
		options.unshift({
			key: 'species',
			label: 'It is …',
			needsValue: [{ key: 'value', label: 'Species', kind: 'choice', choices }]
		});
		options.push({
			key: 'sum',
			label: 'It is a sum of species …',
			needsValue: [{ key: 'value', label: 'Species, for example A + B or A + 0.8 B', kind: 'text' }]
		});
	}
	options.push({
		key: 'new',
		label: 'A new species …',
		needsValue: [{ key: 'value', label: 'Short symbol of the species', kind: 'text' }]
	});
	return options;
}

/** Species of an answer; null, with the finding reopened, when the text names none. */
function answeredSpecies(ex: Examination, taken: Taken): Record<string, number> | null {
	if (taken.key === 'species') return { [taken.text()]: 1 };
	if (taken.key === 'new') {
		const symbol = taken.text();
		if (!/^[A-Za-z][A-Za-z0-9_-]{0,39}$/.test(symbol) || ['constructor', 'prototype'].includes(symbol)) {
			ex.reopen(`"${symbol}" cannot be a symbol. Use letters and digits, beginning with a letter.`);
			return null;
		}
		if (!ex.species.some((s) => s.id === symbol))
			ex.needs.push({
				field: 'species',
				species: symbol,
				message: `Add the species ${symbol} to the scheme.`
			});
		return { [symbol]: 1 };
	}
	const weights = sumOf(taken.text(), new Set(ex.species.map((s) => s.id)));
	if (!weights)
		ex.reopen(`"${taken.text()}" is not a sum of species of the scheme. Write for example A + B.`);
	return weights;
}

/** "A + 0.8 B" as weights; null when a part is not a species. */
export function sumOf(text: string, known: Set<string>): Record<string, number> | null {
	const weights: [string, number][] = [];
	for (const part of text.split('+')) {
		const m = /^\s*(\d+(?:[.,]\d+)?)?\s*[·*x ]?\s*([A-Za-z][A-Za-z0-9_-]*)\s*$/.exec(part);
		if (!m || !known.has(m[2]) || weights.some(([id]) => id === m[2])) return null;
		weights.push([m[2], m[1] ? Number(m[1].replace(',', '.')) : 1]);
	}
	return weights.length > 0 ? Object.fromEntries(weights) : null;
}

function askSpecies(ex: Examination, c: ColumnMapping, header: string): void {
	const letter = columnLetter(c.column);
	const taken = ex.ask({
		rule: 'B32',
		level: 'ask',
		cells: [headerCell(ex, c.column)],
		found: header ? `header "${header}"` : `column ${letter} without a header`,
		expected: `one of the scheme's species${
			ex.species.length
				? `: ${someOf(
						ex.species.map((s) => s.id),
						8
					)}`
				: ''
		}`,
		message: header
			? `Column ${letter}, "${header}", is no species of the scheme. What is it?`
			: `Column ${letter} has no header. What is it?`,
		options: speciesOptions(ex)
	});
	if (!taken) return;
	if (taken.key === 'ignore') {
		c.role = 'ignore';
		ex.conversions.push(`Column ${letter}${header ? ` ("${header}")` : ''} not used.`);
		return;
	}
	const weights = answeredSpecies(ex, taken);
	if (!weights) return;
	c.weights = weights;
	ex.conversions.push(`Column ${letter}${header ? ` ("${header}")` : ''} read as ${nameOf(weights)}.`);
}

/* ---------------------------------------------------------------- two columns for one species, B3 and B32 */

interface Doubles {
	absorbed: Set<number>;
	of: Map<number, number[]>;
}

function settleDoubles(
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

/* ---------------------------------------------------------------- units, B4 */

const PERCENT_BASES: ValueUnit[] = ['area %', '% of charge', 'mol %', '% w/w'];

function askUnit(
	ex: Examination,
	c: { unit: string | null },
	header: ColumnHeader | undefined,
	cell: string
): void {
	if (asUnit(c.unit)) return;
	const percent = header?.unit?.of === 'percent' || isPercentColumn(ex, header?.column);
	const letter = cell.replace(/\d+$/, '');
	const taken = ex.ask({
		rule: 'B4',
		level: 'stop',
		cells: [cell],
		found: percent ? `column ${letter} in %` : `column ${letter} without a unit`,
		expected: percent ? 'what the % are of' : 'a unit',
		message: percent
			? `Column ${letter} is in %. Percent of what? We will not assume.`
			: `Column ${letter} has no unit. Choose one; we will not assume.`,
		options: (percent ? PERCENT_BASES : VALUE_UNITS).map((unit) => ({ key: unit, label: unitLabel(unit) }))
	});
	if (!taken) return;
	c.unit = taken.key;
	ex.conversions.push(`Unit of column ${letter}: ${taken.key}, as chosen.`);
}

const unitLabel = (unit: ValueUnit): string =>
	unit === 'area' ? 'area (a signal, arbitrary units)' : unit === 'umol/L' ? 'µmol/L' : unit;

function isPercentColumn(ex: Examination, column: number | undefined): boolean {
	if (column === undefined) return false;
	const { firstRow, lastRow } = ex.mapping.block;
	for (let r = firstRow; r <= Math.min(lastRow, firstRow + 20); r++) {
		const reading = ex.value(r, column);
		if (reading.kind === 'number') return reading.percent;
	}
	return false;
}

/* ---------------------------------------------------------------- long layout */

function peakChannels(ex: Examination, headers: Map<number, ColumnHeader>): Channel[] {
	const value = ex.mapping.columns.find((c) => c.role === 'value');
	const peakColumn = ex.mapping.columns.find((c) => c.role === 'peak');
	if (!value || !peakColumn) return [];
	askUnit(ex, value, headers.get(value.column), headerCell(ex, value.column));
	const ids = new Set<string>();
	const channels: Channel[] = [];
	for (const peak of ex.mapping.peaks ?? []) {
		if (peak.ignore) continue;
		if (!hasSpecies(peak.weights)) askPeak(ex, peak, peakColumn.column);
		if (peak.ignore || !hasSpecies(peak.weights)) continue;
		const base: ColumnMapping = { column: value.column, role: 'species', unit: value.unit, ...pick(peak) };
		channels.push({
			...channelOf(base, value.column, uniqueId(peak.weights ?? {}, ids), []),
			peak: peak.peak,
			mapping: peak
		});
	}
	return channels;
}

const pick = ({ weights, responseFactor, fitResponse, loq, lod }: PeakMapping) => ({
	weights,
	responseFactor,
	fitResponse,
	loq,
	lod
});

function askPeak(ex: Examination, peak: PeakMapping, column: number): void {
	const taken = ex.ask({
		rule: 'B32',
		level: 'ask',
		cells: [headerCell(ex, column)],
		key: `peak-${peak.peak}`.slice(0, 120),
		found: `peak "${peak.peak}"`,
		expected: `one of the scheme's species${
			ex.species.length
				? `: ${someOf(
						ex.species.map((s) => s.id),
						8
					)}`
				: ''
		}`,
		message: `Peak "${peak.peak}" is no species of the scheme. What is it?`,
		options: speciesOptions(ex)
	});
	if (!taken) return;
	if (taken.key === 'ignore') {
		peak.ignore = true;
		ex.conversions.push(`Peak "${peak.peak}" not used.`);
		return;
	}
	const weights = answeredSpecies(ex, taken);
	if (!weights) return;
	peak.weights = weights;
	ex.conversions.push(`Peak "${peak.peak}" read as ${nameOf(weights)}.`);
}

export const describeChannels = (channels: Channel[]): string => plural(channels.length, 'channel');

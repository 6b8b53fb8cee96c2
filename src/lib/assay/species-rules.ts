/** B32: what a column or a peak is, when its name is no species of the scheme. */
import type { ColumnMapping, FindingOption, PeakMapping } from '$lib/schemas/sheet';
import { headerCell, nameOf } from './channels';
import type { Taken } from './answers';
import type { Examination } from './examination';
import { capital, someOf } from './wording';

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

interface Unmatched {
	/** "Column C, "RRT 0.87"," or "Peak "X"", as a message names it, and for the record. */
	asked: string;
	recorded: string;
	found: string;
	cell: string;
	key?: string;
}

/** Species of what the header or peak names; 'ignore' when it is not to be used, null while that is open. */
function whatIsIt(ex: Examination, it: Unmatched): Record<string, number> | 'ignore' | null {
	const known = ex.species.map((s) => s.id);
	const taken = ex.ask({
		rule: 'B32',
		level: 'ask',
		cells: [it.cell],
		...(it.key ? { key: it.key } : {}),
		found: it.found,
		expected: `one of the scheme's species${known.length ? `: ${someOf(known, 8)}` : ''}`,
		message: `${it.asked}. What is it?`,
		options: speciesOptions(ex)
	});
	if (!taken) return null;
	if (taken.key === 'ignore') {
		ex.conversions.push(`${it.recorded} not used.`);
		return 'ignore';
	}
	const weights = answeredSpecies(ex, taken);
	if (weights) ex.conversions.push(`${it.recorded} read as ${nameOf(weights)}.`);
	return weights;
}

export function askSpecies(ex: Examination, c: ColumnMapping, header: string): void {
	const place = ex.places.series(c.column);
	const outcome = whatIsIt(ex, {
		asked: header
			? `${capital(place)}, "${header}", is no species of the scheme`
			: `${capital(place)} has no header`,
		recorded: `${capital(place)}${header ? ` ("${header}")` : ''}`,
		found: header ? `header "${header}"` : `${place} without a header`,
		cell: headerCell(ex, c.column)
	});
	if (outcome === 'ignore') c.role = 'ignore';
	else if (outcome) c.weights = outcome;
}

export function askPeak(ex: Examination, peak: PeakMapping, column: number): void {
	const outcome = whatIsIt(ex, {
		asked: `Peak "${peak.peak}" is no species of the scheme`,
		recorded: `Peak "${peak.peak}"`,
		found: `peak "${peak.peak}"`,
		cell: headerCell(ex, column),
		key: `peak-${peak.peak}`.slice(0, 120)
	});
	if (outcome === 'ignore') peak.ignore = true;
	else if (outcome) peak.weights = outcome;
}

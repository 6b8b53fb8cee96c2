/** The empty sheet for a scheme: a header row, a unit row, a LOQ row, example rows and notes. It reads back without a finding. */
import type { SpeciesContent } from '$lib/schemas/scheme';
import { matchSpecies, type ColumnHeader } from './columns';
import { speaksOfTime } from './rows';
import { splitHeader } from './units';

export interface TemplateSheet {
	name: string;
	/** Cells by row; null is an empty cell. */
	rows: (string | number | null)[][];
	/** Rows counting from 1 that are set apart in print: header, unit and LOQ row. */
	headRows: number[];
	columnWidth: number;
}

const TIMES = [0, 0.5, 1, 2, 4, 8, 24];
/** Hours of the first-order decay of the example values; the rest goes to the next species. */
const EXAMPLE_TIME = 3;
const CHARGE = 0.5;

export function templateSheets(
	species: SpeciesContent[],
	title = 'Assay values of one run'
): TemplateSheet[] {
	const seen = species.filter((s) => s.role !== 'reagent in excess');
	const columns = seen.length > 0 ? seen : [{ id: 'A', name: '' }];
	const rows: TemplateSheet['rows'] = [
		[plainTitle(title)],
		[],
		['Time', ...columns.map((s) => headerFor(s, species)), 'T internal', 'Sample'],
		['h', ...columns.map(() => 'mol/L'), '°C', null],
		['LOQ', ...columns.map(() => null), null, null],
		...TIMES.map((t, i) => [t, ...exampleValues(t, columns.length), 40, `S${i + 1}`])
	];
	return [
		{ name: 'Run', rows, headRows: [3, 4, 5], columnWidth: 14 },
		{ name: 'Notes', rows: NOTES.map((line) => [line]), headRows: [], columnWidth: 90 }
	];
}

/** The title of a study without what would be taken for a condition of the run. */
const plainTitle = (title: string) => title.slice(0, 100);

/** "HX-14 (A)" where that leads back to the species, else its short symbol. */
function headerFor(s: SpeciesContent, all: SpeciesContent[]): string {
	const full = s.name && s.name !== s.id ? `${s.name} (${s.id})` : s.id;
	const { name, unit, bracket } = splitHeader(full);
	const header: ColumnHeader = { column: 1, parts: [name], header: full, unit, bracket, carried: false };
	return unit === null && !speaksOfTime(full) && matchSpecies(header, all) === s.id ? full : s.id;
}

/** Made-up values that add up to the charge: the first species decays, the next one forms, small parts go to the others. */
function exampleValues(t: number, count: number): (number | null)[] {
	if (t === 0) return Array.from({ length: count }, (_, i) => (i === 0 ? CHARGE : null));
	const unit = 1e5;
	const left = Math.round(CHARGE * Math.exp(-t / EXAMPLE_TIME) * unit);
	if (count === 1) return [left / unit];
	const others = count - 2;
	const gone = CHARGE * unit - left;
	const small = Array.from({ length: others }, (_, i) =>
		Math.round(((gone * 0.3) / others) * (0.8 + (0.4 * i) / others))
	);
	const main = gone - small.reduce((a, b) => a + b, 0);
	return [left, main, ...small].map((v) => v / unit);
}

const NOTES = [
	'One sheet holds one run. Replace the example rows with your own; they are invented.',
	'Time: elapsed hours from your time zero. Change the unit row to s, min, h or d, or format the cells as [h]:mm.',
	'Values: change the unit row to mol/L, mmol/L, g/L, area %, % of charge or another unit; each column has one unit.',
	'Below the limit of quantitation: write <LOQ and give the limit in the row LOQ, or write the limit itself, such as <0.002.',
	'No value: leave the cell empty. A typed 0 counts as a measured zero.',
	'Replicate samples: one row each, with their own sample names. Injections of one sample: the same sample name in each row.',
	'Temperature: the internal temperature at each sample, or leave the column empty.',
	'Either decimal sign is read; use one throughout the file.',
	'Columns that you do not need may be deleted.'
];

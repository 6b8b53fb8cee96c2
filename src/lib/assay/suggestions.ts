/** Conditions that a sheet mentions: offered with the place where they stand, never used by themselves. */
import type { SpeciesContent } from '$lib/schemas/scheme';
import type { Mapping, Suggestion, TableProposal } from '$lib/schemas/sheet';
import { readCell } from './cells';
import { address, type SheetView } from './grid';
import { parseNumber, type Decimal } from './numbers';
import { Places } from './orientation';
import { median } from './statistics';
import type { FoundTable } from './tables';
import { readUnit, type UnitReading } from './units';

type Suggested = Pick<TableProposal['suggested'], 'temperature' | 'initial'>;

export function suggestConditions(
	view: SheetView,
	/** The sheet as received, where the lines above the table are. */
	sheet: SheetView,
	found: FoundTable,
	mapping: Mapping,
	species: SpeciesContent[],
	decimal: Decimal | null
): Suggested {
	const temperature =
		temperatureFrom(found.title, `"${found.title}"`) ??
		temperatureAbove(sheet, found) ??
		temperatureFrom(found.sheet, `sheet name "${found.sheet}"`) ??
		temperatureFromName(found.sheet) ??
		temperatureFromLog(view, mapping);
	const initial =
		chargeAbove(sheet, found, species, decimal) ?? chargeFromZeroRow(view, mapping, new Places(found.across));
	return { ...(temperature ? { temperature } : {}), ...(initial ? { initial } : {}) };
}

const DEGREES = /(-?\d{1,3}(?:[.,]\d+)?)\s*(°\s*C|degC|deg C|℃|K\b)/;

function temperatureFrom(text: string, source: string): Suggestion | null {
	const m = DEGREES.exec(text);
	if (!m) return null;
	return { value: Number(m[1].replace(',', '.')), unit: m[2] === 'K' ? 'K' : 'degC', source };
}

/** "run2_50C" in the name of a sheet or file. */
function temperatureFromName(name: string): Suggestion | null {
	const m = /(?:^|[^\d.])(-?\d{1,3})[ _]?(?:deg)?C(?![a-z\d])/.exec(name);
	return m ? { value: Number(m[1]), unit: 'degC', source: `name "${name}"` } : null;
}

function temperatureAbove(view: SheetView, found: FoundTable): Suggestion | null {
	for (const { row, text } of found.above) {
		const stated = temperatureFrom(text, address(row, view.cellsOfRow(row)[0]?.[0] ?? 1));
		if (stated) return stated;
	}
	return null;
}

function temperatureFromLog(view: SheetView, mapping: Mapping): Suggestion | null {
	const column = mapping.columns.find((c) => c.role === 'temperature');
	if (!column || (column.unit !== 'degC' && column.unit !== 'K')) return null;
	const values: number[] = [];
	for (const r of view.filledRows(mapping.block.firstRow, mapping.block.lastRow)) {
		const reading = readCell(view.workbook, view.cell(r, column.column), mapping.decimal);
		if (reading.kind === 'number') values.push(reading.value);
	}
	if (values.length === 0) return null;
	return {
		value: Number(median(values).toPrecision(6)),
		unit: column.unit,
		source: 'middle of the temperature readings'
	};
}

/** "Charge | A 0,500 mol/L" above the table. */
function chargeAbove(
	view: SheetView,
	found: FoundTable,
	species: SpeciesContent[],
	decimal: Decimal | null
): Record<string, Suggestion> | null {
	const initial: [string, Suggestion][] = [];
	for (const { row, text } of found.above) {
		for (const m of text.matchAll(
			/([\d.,]*\d)\s*((?:m|µ|u)?mol\s?\/\s?L|m?M\b|%)(?:\s+(?:of\s+)?([\p{L}\d-]+))?/giu
		)) {
			const before = text.slice(0, m.index);
			const named = species.filter((s) => isNamed(before, s, true) || isNamed(m[3] ?? '', s, false));
			const value = parseNumber(m[1], decimal) ?? parseNumber(m[1], null);
			const unit = m[2] === '%' ? '%' : unitName(m[2]);
			if (named.length !== 1 || value === null || !unit || initial.some(([id]) => id === named[0].id))
				continue;
			initial.push([named[0].id, { value, unit, source: address(row, view.cellsOfRow(row)[0]?.[0] ?? 1) }]);
		}
	}
	return initial.length > 0 ? Object.fromEntries(initial) : null;
}

function unitName(text: string): string | null {
	const unit = readUnit(text);
	return unit?.of === 'value' ? unit.unit : null;
}

/** The name stands right before the amount: "A 0,500", "A = 0.5", "HX-14: 0.5". */
function isNamed(text: string, s: SpeciesContent, atEnd: boolean): boolean {
	return [s.id, s.name].some((name) => {
		if (!name) return false;
		const escaped = name.replace(/[.*+?^${}()|[\]\\]/g, '\\$&');
		return new RegExp(atEnd ? `(?:^|[^\\p{L}\\d-])${escaped}\\s*[:=]?\\s*$` : `^${escaped}$`, 'u').test(text);
	});
}

function chargeFromZeroRow(
	view: SheetView,
	mapping: Mapping,
	places: Places
): Record<string, Suggestion> | null {
	const time = mapping.columns.find((c) => c.role === 'time');
	if (!time || mapping.layout !== 'wide') return null;
	const row = mapping.block.firstRow;
	const zero = readCell(view.workbook, view.cell(row, time.column), mapping.decimal);
	const raw = view.cell(row, time.column)?.[1];
	if (raw !== 0 && !(zero.kind === 'number' && zero.value === 0)) return null;
	const initial: [string, Suggestion][] = [];
	for (const c of mapping.columns) {
		const ids = Object.keys(c.weights ?? {});
		if (c.role !== 'species' || ids.length !== 1 || !c.unit || initial.some(([id]) => id === ids[0]))
			continue;
		const reading = readCell(view.workbook, view.cell(row, c.column), mapping.decimal);
		// A number format that writes the column's own unit says nothing new.
		const own = reading.kind === 'with unit' && reading.format === true && sameUnit(reading.unit, c.unit);
		if (reading.kind !== 'number' && !own) continue;
		if (!(reading.value > 0)) continue;
		const relative = ['% of charge', 'mol %', 'area %'].includes(c.unit);
		if (!relative && !c.unit.includes('mol/L')) continue;
		initial.push([
			ids[0],
			{ value: reading.value, unit: relative ? '%' : c.unit, source: places.at(row, c.column) }
		]);
	}
	// Traces at time zero are no charge.
	const most = Math.max(0, ...initial.map(([, q]) => q.value));
	const charged = initial.filter(([, q]) => q.value >= most * 0.05);
	return charged.length > 0 ? Object.fromEntries(charged) : null;
}

const sameUnit = (reading: UnitReading, unit: string): boolean =>
	reading.of === 'value' && reading.unit === unit;

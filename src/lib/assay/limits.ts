/** LOQ and LOD that a sheet states: in rows of their own, in footers, in texts above. Offered to the person, never assumed. */
import type { FoundBlock } from './blocks';
import type { Channel } from './channels';
import { readValueText } from './cells';
import type { Decimal } from './numbers';
import { Places } from './orientation';
import { address, type SheetView } from './grid';
import { MASS_FACTOR, MOLAR_FACTOR, readUnit } from './units';
import { limitKind } from './words';

export type LimitKind = 'loq' | 'lod';

export interface StatedLimit {
	value: number;
	unit: string | null;
	source: string;
}

export interface StatedLimits {
	/** For the whole table. */
	loq?: StatedLimit;
	lod?: StatedLimit;
	/** By column: "loq:5". */
	byColumn: Map<string, StatedLimit>;
}

const MENTION =
	/\b(LOQ|LLOQ|LOD|BG|NG|Bestimmungsgrenze|Nachweisgrenze|limit of (?:quanti(?:t|fic)ation|detection))\b\s*[:=(]*\s*(?:was|is|of|von)?\s*(?:<|≤)?\s*([\d.,]*\d)\s*([^\s;,()\d]{1,12}(?:\s?%)?)?/gi;

export function statedLimits(
	view: SheetView,
	/** The sheet as received, where the lines above the table are. */
	sheet: SheetView,
	found: FoundBlock | undefined,
	decimal: Decimal | null
): StatedLimits {
	const limits: StatedLimits = { byColumn: new Map() };
	if (!found) return limits;
	const places = new Places(view !== sheet);
	for (const row of found.limitRows) readLimitRow(view, row, found, decimal, limits, places);
	const footers = places.across ? [] : found.footerRows.map((f) => f.row);
	for (const row of [...footers, ...found.above.map((a) => a.row)])
		for (const cell of sheet.cellsOfRow(row))
			if (typeof cell[1] === 'string') mentions(cell[1], address(row, cell[0]), decimal, limits);
	return limits;
}

/** "LOQ | 0.002 | 0.002": a limit for each column. */
function readLimitRow(
	view: SheetView,
	row: number,
	found: FoundBlock,
	decimal: Decimal | null,
	limits: StatedLimits,
	places: Places
): void {
	const lead = view.cellsOfRow(row).find((c) => typeof c[1] === 'string');
	const kind = limitKind(String(lead?.[1] ?? ''));
	for (const cell of view.cellsOfRow(row)) {
		if (cell === lead || cell[0] < found.block.firstColumn || cell[0] > found.block.lastColumn) continue;
		const reading =
			typeof cell[1] === 'number'
				? { kind: 'number' as const, value: cell[1] }
				: readValueText(String(cell[1] ?? ''), decimal);
		if (reading.kind !== 'number' || !(reading.value > 0)) continue;
		limits.byColumn.set(`${kind}:${cell[0]}`, {
			value: reading.value,
			unit: null,
			source: places.at(row, cell[0])
		});
	}
}

function mentions(text: string, source: string, decimal: Decimal | null, limits: StatedLimits): void {
	for (const [, word, number, unitText] of text.matchAll(MENTION)) {
		const reading = readValueText(number, decimal);
		const either = reading.kind === 'undecided' ? readValueText(number, '.') : reading;
		if (either.kind !== 'number' || !(either.value > 0)) continue;
		const unit = unitText ? readUnit(unitText.trim()) : null;
		const stated: StatedLimit = {
			value: either.value,
			unit: unit?.of === 'value' ? unit.unit : unit?.of === 'percent' ? '%' : null,
			source
		};
		limits[limitKind(word)] ??= stated;
	}
}

/** The limit that the sheet states for a channel, in the channel's unit; undefined when none can be carried over. */
export function suggestLimit(
	limits: StatedLimits,
	channel: Channel,
	kind: LimitKind
): { value: number; source: string } | undefined {
	const own = channel.peak === undefined ? limits.byColumn.get(`${kind}:${channel.column}`) : undefined;
	if (own) return own;
	const stated = limits[kind];
	if (!stated) return undefined;
	if (stated.unit === null || stated.unit === channel.unit) return stated;
	if (stated.unit === '%') return channel.unit?.includes('%') ? stated : undefined;
	const value = convertUnit(stated.value, stated.unit, channel.unit);
	return value === null ? undefined : { value, source: stated.source };
}

/** Between molar units or between mass concentrations; null when there is no fixed factor. */
export function convertUnit(value: number, from: string | null, to: string | null): number | null {
	if (from === to) return value;
	for (const factors of [MOLAR_FACTOR, MASS_FACTOR] as Partial<Record<string, number>>[]) {
		const [a, b] = [factors[from ?? ''], factors[to ?? '']];
		if (a !== undefined && b !== undefined) return Number(((value / a) * b).toPrecision(15));
	}
	return null;
}

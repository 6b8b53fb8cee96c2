/** Headers that name the replicates of one species: "A rep 1", "A inj 2", "A #1", "A (1)". */
import type { SpeciesContent } from '$lib/schemas/scheme';
import { type ColumnHeader, matchName, matchSpecies } from './columns';

export interface ReplicateMark {
	/** The header without its mark. */
	base: string;
	/** "1", "2", "a". */
	number: string;
	/** What the header itself calls it. */
	kind: 'injections' | 'samples' | null;
}

const WORD =
	'rep(?:l|licate|lik(?:at)?)?|inj(?:ection|ektion)?|einspritzung|sample|probe|aliquot|wdh|wiederholung|det(?:ermination)?|best(?:immung)?|prep|vial|no|nr|#';
const WORDED = new RegExp(
	`^(.+?)[\\s_.,:;/-]*[([]?\\s*(${WORD})\\s*[.:#_-]*\\s*(\\d{1,2}|[a-d])\\s*[)\\]]?$`,
	'i'
);
const BARE = /^(.+?)(?:\s*[([]\s*(\d{1,2})\s*[)\]]|[\s_.-]+(\d{1,2}))$/;
const SECOND = /^(.+?)[\s_.,:-]*[([]?(dup(?:licate)?|duplikat|doppel(?:bestimmung)?)\.?[)\]]?$/i;

/** The mark of a header; null when it bears none. */
export function replicateMark(header: ColumnHeader): ReplicateMark | null {
	const last = header.parts.at(-1) ?? '';
	const text = header.bracket ? `${last} (${header.bracket})` : last;
	const worded = WORDED.exec(text);
	if (worded) return { base: worded[1].trim(), number: worded[3].toLowerCase(), kind: kindOf(worded[2]) };
	const second = SECOND.exec(text);
	if (second) return { base: second[1].trim(), number: '2', kind: null };
	const bare = BARE.exec(text);
	return bare ? { base: bare[1].trim(), number: bare[2] ?? bare[3], kind: null } : null;
}

const kindOf = (word: string): ReplicateMark['kind'] =>
	/^(inj|einspritz)/i.test(word)
		? 'injections'
		: /^(sample|probe|aliquot|prep|vial)/i.test(word)
			? 'samples'
			: null;

/** The species of each column whose header names a replicate of one; a lone "A (1)" is nobody's replicate. */
export function replicateSpecies(headers: ColumnHeader[], species: SpeciesContent[]): Map<number, string> {
	const groups = new Map<string, { column: number; species: string; number: string; marked: boolean }[]>();
	for (const h of headers) {
		const whole = matchSpecies(h, species);
		const mark = whole ? null : replicateMark(h);
		const id = whole ?? (mark && matchName(mark.base, species));
		if (!id) continue;
		const quantity = `${id}|${h.group ?? ''}|${h.unit?.of === 'value' ? h.unit.unit : (h.unit?.of ?? '')}`;
		const own = groups.get(quantity) ?? [];
		groups.set(quantity, [
			...own,
			{ column: h.column, species: id, number: mark?.number ?? '1', marked: mark !== null }
		]);
	}
	const found = new Map<number, string>();
	for (const own of groups.values())
		if (own.length > 1 && new Set(own.map((o) => o.number)).size === own.length)
			for (const o of own) if (o.marked) found.set(o.column, o.species);
	return found;
}

/** True when the headers of columns that are one species number them as its replicates; one of them may go without. */
export function areReplicates(headers: (ColumnHeader | undefined)[], species: SpeciesContent[]): boolean {
	const marks = headers.map((h) => (h && !matchSpecies(h, species) ? replicateMark(h) : null));
	const numbers = marks.map((m) => m?.number ?? '1');
	return (
		marks.filter((m) => m === null).length <= 1 &&
		marks.some((m) => m) &&
		new Set(numbers).size === numbers.length
	);
}

import type { RecipeContent } from '$lib/schemas/recipe';

/** One place in which two versions differ, in words that a reader finds on the page. */
export interface Difference {
	place: string;
	from: string | null;
	to: string | null;
}

const SECTIONS: [keyof RecipeContent, string][] = [
	['title', 'Title'],
	['target', 'Target'],
	['criteria', 'Acceptance criteria'],
	['basis', 'Basis'],
	['setPoints', 'Set-points'],
	['hold', 'Hold time'],
	['scale', 'Scale'],
	['charges', 'Charges'],
	['equipment', 'Equipment requirements'],
	['procedure', 'Procedure'],
	['ipc', 'In-process controls'],
	['hazards', 'Hazard statements'],
	['heat', 'Heat and gas data'],
	['confirmationRunId', 'Confirmation run'],
	['justification', 'Justification'],
	['other', 'Other information']
];

const show = (value: unknown): string | null => {
	if (value === null || value === undefined || value === '') return null;
	if (typeof value === 'string') return value;
	if (typeof value === 'number' || typeof value === 'boolean') return String(value);
	if (Array.isArray(value)) return value.map((v) => show(v) ?? '–').join(' to ');
	return Object.values(value)
		.map(show)
		.filter((v) => v !== null)
		.join(' ');
};

const same = (a: unknown, b: unknown): boolean => JSON.stringify(sorted(a)) === JSON.stringify(sorted(b));
function sorted(value: unknown): unknown {
	if (Array.isArray(value)) return value.map(sorted);
	if (value === null || typeof value !== 'object') return value ?? null;
	return Object.fromEntries(
		Object.entries(value)
			.filter(([, v]) => v !== undefined)
			.sort(([a], [b]) => (a < b ? -1 : 1))
			.map(([k, v]) => [k, sorted(v)])
	);
}

interface Item {
	id: string;
	[field: string]: unknown;
}
const isItems = (value: unknown): value is Item[] =>
	Array.isArray(value) && value.every((v) => typeof v === 'object' && v !== null && 'id' in v);

const nameOf = (item: Item): string => {
	const name =
		item.parameter ?? item.material ?? item.product ?? item.kind ?? item.test ?? item.text ?? item.id;
	return typeof name === 'string' ? name : item.id;
};

function itemDifferences(section: string, from: Item[], to: Item[]): Difference[] {
	const before = new Map(from.map((i) => [i.id, i]));
	const after = new Map(to.map((i) => [i.id, i]));
	const found: Difference[] = [];
	for (const item of from)
		if (!after.has(item.id)) found.push({ place: `${section}: ${nameOf(item)}`, from: show(item), to: null });
	for (const item of to) {
		const old = before.get(item.id);
		if (!old) found.push({ place: `${section}: ${nameOf(item)}`, from: null, to: show(item) });
		else
			for (const field of Object.keys({ ...old, ...item }))
				if (!same(old[field], item[field]))
					found.push({
						place: `${section}: ${nameOf(item)}, ${words(field)}`,
						from: show(old[field]),
						to: show(item[field])
					});
	}
	const kept = (list: Item[], other: Map<string, Item>) =>
		list.filter((i) => other.has(i.id)).map((i) => i.id);
	const orderFrom = kept(from, after);
	const orderTo = kept(to, before);
	if (!same(orderFrom, orderTo)) {
		const line = (list: Item[]) => list.map(nameOf).join(', ');
		found.push({ place: `${section}: order`, from: line(from), to: line(to) });
	}
	return found;
}

const FIELD_WORDS: Record<string, string> = {
	nor: 'NOR',
	par: 'PAR',
	value: 'set-point',
	binds: 'limit that binds',
	durationMin: 'duration (min)',
	maxDurationMin: 'longest duration (min)',
	fromC: 'start temperature (°C)',
	toC: 'end temperature (°C)',
	molarMassGPerMol: 'molar mass (g/mol)',
	densityKgPerL: 'density (kg/L)',
	lagMin: 'turnaround (min)',
	atMin: 'sample time (min)'
};
const words = (field: string): string =>
	FIELD_WORDS[field] ?? field.replace(/([A-Z])/g, (letter) => ` ${letter.toLowerCase()}`);

function recordDifferences(section: string, from: object, to: object): Difference[] {
	const a = from as Record<string, unknown>;
	const b = to as Record<string, unknown>;
	return Object.keys({ ...a, ...b })
		.filter((field) => !same(a[field], b[field]))
		.map((field) => ({ place: `${section}: ${words(field)}`, from: show(a[field]), to: show(b[field]) }));
}

/** Every place in which `to` differs from `from`, section by section. */
export function differences(from: RecipeContent, to: RecipeContent): Difference[] {
	return SECTIONS.flatMap(([key, section]) => {
		const a = from[key];
		const b = to[key];
		if (same(a, b)) return [];
		if (isItems(a) && isItems(b) && (a.length > 0 || b.length > 0)) return itemDifferences(section, a, b);
		const bothRecords = [a, b].every((v) => typeof v === 'object' && v !== null && !Array.isArray(v));
		if (bothRecords) return recordDifferences(section, a as object, b as object);
		return [{ place: section, from: show(a), to: show(b) }];
	});
}

/** "differs from version 2 in 4 places" */
export function differenceSentence(count: number, version: number): string {
	if (count === 0) return `same content as version ${version}`;
	return `differs from version ${version} in ${count} ${count === 1 ? 'place' : 'places'}`;
}

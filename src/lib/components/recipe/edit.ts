import type { RecipeContent } from '$lib/schemas/recipe';

/** Lists of a recipe whose entries have an id. */
export type ListKey = 'setPoints' | 'charges' | 'equipment' | 'procedure' | 'ipc' | 'hazards';
type Item<K extends ListKey> = RecipeContent[K][number];

/** A change to a draft; changes with one key that follow each other closely are undone as one. */
export type Change = (next: RecipeContent, key?: string) => void;

export function withItem<K extends ListKey>(
	content: RecipeContent,
	list: K,
	id: string,
	fields: Partial<Item<K>>
): RecipeContent {
	const items = content[list] as Item<K>[];
	return { ...content, [list]: items.map((i) => (i.id === id ? { ...i, ...fields } : i)) };
}

export function without<K extends ListKey>(content: RecipeContent, list: K, id: string): RecipeContent {
	return { ...content, [list]: (content[list] as Item<K>[]).filter((i) => i.id !== id) };
}

export function added<K extends ListKey>(content: RecipeContent, list: K, item: Item<K>): RecipeContent {
	return { ...content, [list]: [...content[list], item] };
}

/** Moves an entry up or down by `by` places; at the ends it stays. */
export function moved<T extends { id: string }>(items: readonly T[], id: string, by: number): T[] {
	const from = items.findIndex((i) => i.id === id);
	const to = Math.min(items.length - 1, Math.max(0, from + by));
	if (from < 0 || to === from) return [...items];
	const next = [...items];
	next.splice(to, 0, ...next.splice(from, 1));
	return next;
}

/** An id that no entry of the list has yet: op1, op2, … */
export function freshId(items: readonly { id: string }[], prefix: string): string {
	const used = new Set(items.map((i) => i.id));
	for (let n = items.length + 1; ; n++) if (!used.has(`${prefix}${n}`)) return `${prefix}${n}`;
}

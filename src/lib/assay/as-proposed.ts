/**
 * The settlement of a table as it was proposed, kept with its mapping. To propose a table is to settle it once; whoever settles
 * it next, untouched, need not go through all its cells again.
 */
import type { Mapping, Settlement } from '$lib/schemas/sheet';

const kept = new WeakMap<Mapping, Settlement>();

export function keepAsProposed(mapping: Mapping, settlement: Settlement): void {
	kept.set(mapping, settlement);
}

/** Null for a mapping that no proposal made, or that was made anew since: only the very same object counts. */
export const settledAsProposed = (mapping: Mapping): Settlement | null => kept.get(mapping) ?? null;

import type { RecipeContent } from '$lib/schemas/recipe';
import { contentHash } from '../audit/canonical';

export interface SignedRecord {
	recipeId: string;
	number: number;
	fitId: string;
	windowId: string | null;
	content: RecipeContent;
}

/**
 * Hash of the exact version, as signed: the content together with whose content it is, so that a signature cannot be
 * carried over to another record (21 CFR 11.70).
 */
export const versionHash = (record: SignedRecord): string =>
	contentHash({
		recipeId: record.recipeId,
		number: record.number,
		fitId: record.fitId,
		windowId: record.windowId,
		content: record.content
	});

/** First and last digits of the hash, for people to compare. */
export const shortHash = (hash: string): string => `${hash.slice(0, 8)}…${hash.slice(-4)}`;

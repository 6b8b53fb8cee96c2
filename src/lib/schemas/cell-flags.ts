/** Bits of a cell's fourth place. Apart from the schemas, so that the reading worker stays small. */
export const CELL = {
	formula: 1,
	error: 2,
	/** A formula without a stored result. */
	uncomputed: 4,
	/** Text that the file marks as text (leading apostrophe). */
	quoted: 8
} as const;

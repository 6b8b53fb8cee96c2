/** What one file may cost. Generous for assay sheets (20 000 rows × 12 columns is about 15 MB of XML), far below harm. */
export interface ReadingLimits {
	fileBytes: number;
	/** Members of the zip. */
	members: number;
	/** Sum of what the members that are read may unfold to, and of any one of them. */
	unfoldedBytes: number;
	/** Unfolded size of all members together, read or not. */
	declaredBytes: number;
	/** Cells with a value. */
	cells: number;
	/** Cell and row elements without a value, over all sheets. */
	emptyElements: number;
	/** XML elements of one part. */
	elements: number;
	/** Characters of text in all cells together (a shared text counts each time it is used). */
	textCharacters: number;
	sheets: number;
	merges: number;
	timeoutMs: number;
}

export const LIMITS: ReadingLimits = {
	fileBytes: 20 * 1024 * 1024,
	members: 2_000,
	unfoldedBytes: 64 * 1024 * 1024,
	declaredBytes: 256 * 1024 * 1024,
	cells: 300_000,
	emptyElements: 250_000,
	elements: 2_000_000,
	textCharacters: 8_000_000,
	sheets: 100,
	merges: 5_000,
	timeoutMs: 15_000
};

export const CELL_TEXT = 32_767;
export const megabytes = (bytes: number): string => `${Math.round(bytes / 104_857.6) / 10} MB`;

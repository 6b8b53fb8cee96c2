/** One line on a window result for the station strip. */
export function windowLine(kind: string, result: unknown): string {
	const line = (result as { summary?: unknown } | null)?.summary;
	return typeof line === 'string' && line ? line : kind;
}

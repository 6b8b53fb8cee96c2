/** Text with sorted keys, so that equal inputs always give the same key. */
function stableText(value: unknown): string {
	if (value === null || typeof value !== 'object') return JSON.stringify(value) ?? 'null';
	if (Array.isArray(value)) return `[${value.map(stableText).join(',')}]`;
	const entries = Object.entries(value as Record<string, unknown>).filter(([, v]) => v !== undefined);
	entries.sort(([a], [b]) => (a < b ? -1 : 1));
	return `{${entries.map(([k, v]) => `${JSON.stringify(k)}:${stableText(v)}`).join(',')}}`;
}

/**
 * Short fingerprint of the inputs of a caution (FNV-1a, 64 bit, Fowler, Noll and Vo). It tells equal inputs from changed
 * ones so that "read by" falls away with them; it proves nothing, signatures use SHA-256.
 */
export function stableKey(code: string, inputs: unknown): string {
	let hash = 0xcbf29ce484222325n;
	for (const unit of new TextEncoder().encode(stableText(inputs))) {
		hash ^= BigInt(unit);
		hash = (hash * 0x100000001b3n) & 0xffffffffffffffffn;
	}
	return `${code}:${hash.toString(16).padStart(16, '0')}`;
}

export const plural = (n: number, one: string, many = `${one}s`): string => `${n} ${n === 1 ? one : many}`;

/** 12.3 kB, 1.4 MB. */
export function fileSize(bytes: number): string {
	if (bytes < 1000) return plural(bytes, 'byte');
	if (bytes < 1_000_000) return `${(bytes / 1000).toFixed(1)} kB`;
	return `${(bytes / 1_000_000).toFixed(1)} MB`;
}

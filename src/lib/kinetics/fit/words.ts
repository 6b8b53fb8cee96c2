/** Numbers and durations as people read them. */

/** Three significant figures, without a needless exponent. */
export function figure(value: number, digits = 3): string {
	if (value === 0) return '0';
	const size = Math.abs(value);
	if (size >= 1e5 || size < 1e-4) return value.toExponential(digits - 1);
	return String(Number(value.toPrecision(digits)));
}

/** A time in s in the unit asked for, with three figures. */
export function duration(seconds: number, unit: 's' | 'min' | 'h' | 'd'): string {
	const factor = { s: 1, min: 60, h: 3600, d: 86400 }[unit];
	return `${figure(seconds / factor)} ${unit}`;
}

export const plural = (n: number, one: string, many = `${one}s`): string => `${n} ${n === 1 ? one : many}`;

/** A number with its unit; a bare factor has none to show. */
export const withUnit = (value: number, unit: string): string =>
	unit === '1' ? figure(value) : `${figure(value)} ${unit}`;

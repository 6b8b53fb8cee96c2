/**
 * Rounding that errs on the adverse side. A hold time is rounded down and an earliest time up, so that the printed
 * figure is never more generous than the computed one. Two significant digits: 37.8 h prints as 37 h, 3.06 h as 3.0 h.
 */

/** A quotient this close to a whole number counts as that number: 4.6 / 0.1 is 45.999999999999993. */
const WHOLE = 1e-9;

function toward(value: number, digits: number, round: (x: number) => number): number {
	if (!Number.isFinite(value)) throw new RangeError(`Only a finite number can be rounded, not ${value}.`);
	if (value === 0) return 0;
	const decimals = digits - 1 - Math.floor(Math.log10(Math.abs(value)));
	// Powers of ten are exact up to 22: scale by whole ones so that 3.06 does not become 3.0600000000000005.
	const scaled = decimals >= 0 ? value * 10 ** decimals : value / 10 ** -decimals;
	const nearest = Math.round(scaled);
	const whole = Math.abs(scaled - nearest) <= WHOLE * Math.abs(nearest) ? nearest : round(scaled);
	return decimals >= 0 ? whole / 10 ** decimals : whole * 10 ** -decimals;
}

/** `value` rounded toward −∞ to `digits` significant digits. */
export const roundDown = (value: number, digits = 2): number => toward(value, digits, Math.floor);
/** `value` rounded toward +∞ to `digits` significant digits. */
export const roundUp = (value: number, digits = 2): number => toward(value, digits, Math.ceil);

/** A number as the recipe prints it: at most `digits` significant digits, no exponent within plain reach. */
export function plain(value: number, digits = 3): string {
	if (value === 0) return '0';
	const size = Math.abs(value);
	if (size >= 10 ** digits && size < 1e7) return String(Math.round(value));
	if (size < 1e-4 || size >= 1e7) return value.toExponential(digits - 1).replace('e+', 'e');
	return String(Number(value.toPrecision(digits)));
}

/** Minutes as people say them: 15 min, 3.06 h, 37 h. */
export function duration(minutes: number, digits = 3): string {
	return minutes < 180 ? `${plain(minutes, digits)} min` : `${plain(minutes / 60, digits)} h`;
}

const MINUTES = { min: 1, h: 60, d: 1440 } as const;
export const inMinutes = (value: number, unit: keyof typeof MINUTES): number => value * MINUTES[unit];

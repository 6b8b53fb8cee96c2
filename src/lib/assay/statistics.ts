/** The little statistics that reading a sheet needs: the slope of a line with its interval, and the median. */
import { straightLine } from '../kinetics/fit/straight-line';
import { studentQuantile } from '../kinetics/fit/distributions';

export interface Slope {
	value: number;
	low: number;
	high: number;
}

/** Least-squares slope with its 95 % interval, ± t(0.975; n − 2) standard errors; null below three points or without spread in x. */
export function slopeWithInterval(x: number[], y: number[]): Slope | null {
	if (x.length < 3 || new Set(x).size < 2) return null;
	const { slope, slopeError } = straightLine(x, y);
	const half = studentQuantile(0.975, x.length - 2) * slopeError;
	return { value: slope, low: slope - half, high: slope + half };
}

export function median(values: number[]): number {
	const sorted = [...values].sort((a, b) => a - b);
	const m = sorted.length >> 1;
	return sorted.length % 2 ? sorted[m] : (sorted[m - 1] + sorted[m]) / 2;
}

/** Plain-word sentences for the figures of a window. */
import type { Figure, WindowTimeUnit } from '../../schemas/window';
import { threeDigits } from '../criteria-hold';

export const SECONDS: Record<WindowTimeUnit, number> = { s: 1, min: 60, h: 3600, d: 86_400 };

/** Three significant digits, zeros kept, with the unit. */
export const withUnit = (value: number, unit: string): string => `${threeDigits(value)} ${unit}`.trim();

/** "3.84 h (95 % interval 3.71 to 3.98 h)"; open ends in words. */
export function describeFigure(figure: Figure, unit: string, confidence: number): string {
	const value =
		figure.value === null
			? figure.state === 'never'
				? 'never'
				: 'without end'
			: withUnit(figure.value, unit);
	const interval = describeInterval(figure, unit, confidence);
	return interval ? `${value} (${interval})` : value;
}

/** "95 % interval 3.71 to 3.98 h"; empty where there is none. */
export function describeInterval(figure: Figure, unit: string, confidence: number): string {
	if (!figure.interval) return '';
	const [low, high] = figure.interval;
	const name = `${percent(confidence)} interval`;
	if (low === null && high === null) return `${name} open on both sides`;
	if (low === null) return `${name} up to ${withUnit(high!, unit)}, open below`;
	if (high === null) return `${name} from ${withUnit(low, unit)}, open above`;
	const [a, b] = [threeDigits(low), threeDigits(high)];
	return a === b ? `${name} ${a} ${unit} to three digits` : `${name} ${a} to ${b} ${unit}`;
}

/** 0.95 → "95 %". */
export const percent = (share: number): string => `${Number((100 * share).toPrecision(3))} %`;

/** "in 12.3 % of the draws", "in less than 0.1 % of the draws"; empty for none. */
export function describeNeverShare(neverPercent: number, draws: number): string {
	if (neverPercent === 0 || draws === 0) return '';
	if (neverPercent < 0.1) return 'in less than 0.1 % of the draws';
	return `in ${Number(neverPercent.toPrecision(3))} % of the draws`;
}

/** "from 3.84 to 4.64 h", "from 3.84 h on", "up to 4.64 h", "at all times". */
export function describeSpan(from: number, to: number | null, unit: string): string {
	if (from === 0) return to === null ? 'at all times' : `from the start to ${withUnit(to, unit)}`;
	return to === null
		? `from ${withUnit(from, unit)} on`
		: `from ${threeDigits(from)} to ${withUnit(to, unit)}`;
}

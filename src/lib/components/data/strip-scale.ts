/** Scale of a small strip chart whose axis need not begin at zero: temperatures, mass balances. */
export interface Scale {
	min: number;
	max: number;
	ticks: number[];
}

/** Lowest and highest; a list may be longer than a call can have arguments. */
const extent = (values: number[]): [number, number] =>
	values.reduce(([low, high], v) => [Math.min(low, v), Math.max(high, v)], [Infinity, -Infinity] as [number, number]);

const tidy = (n: number): number => Number(n.toPrecision(10));

function stepFor(span: number, most: number): number {
	const rough = span / most;
	const power = 10 ** Math.floor(Math.log10(rough));
	return tidy(([1, 2, 5, 10].find((m) => m * power >= rough * (1 - 1e-9)) ?? 10) * power);
}

/** Round limits around the values, at least `least` apart, with about `most` steps between them. */
export function niceScale(values: number[], least: number, most = 4): Scale {
	const finite = values.filter((v) => Number.isFinite(v));
	let [low, high] = finite.length ? extent(finite) : [0, 1];
	if (high - low < least) {
		const middle = (low + high) / 2;
		[low, high] = [middle - least / 2, middle + least / 2];
	}
	const step = stepFor(high - low, most);
	const min = tidy(Math.floor(low / step + 1e-9) * step);
	const max = tidy(Math.ceil(high / step - 1e-9) * step);
	const count = Math.round((max - min) / step);
	return { min, max, ticks: Array.from({ length: count + 1 }, (_, i) => tidy(min + i * step)) };
}

/** A little more room at both ends, so that no point lies on the rim. */
export function padded(values: number[]): number[] {
	if (values.length === 0) return values;
	const [low, high] = extent(values);
	const room = 0.06 * (high - low);
	return [low - room, high + room];
}

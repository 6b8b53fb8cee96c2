/** Values multiplied by a factor; limits are scaled as numbers are. */
import type { AssayValue, ChannelContent } from '$lib/schemas/run';
import type { Point } from './timepoints';

export type Content = (unit: string, factor: number) => ChannelContent;

/** Fifteen digits: what a sheet holds; removes the dust of binary factors. */
export const tidy = (value: number) => Number(value.toPrecision(15));

export function scale(points: Point[], id: string, f: (v: number) => number): void {
	for (const p of points) {
		const v = p.values.get(id);
		if (v !== undefined)
			p.values.set(
				id,
				mapValue(v, (x) => tidy(f(x)))
			);
	}
}

export function mapValue(v: AssayValue, f: (x: number) => number): AssayValue {
	if (v === null) return null;
	if (typeof v === 'number') return f(v);
	return 'below' in v ? { below: f(v.below) } : { above: f(v.above) };
}

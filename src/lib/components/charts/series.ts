/**
 * How a species looks, the same on every page: colour, marker and dash together, so that no one of them has to carry it alone.
 * Palette: M. Okabe & K. Ito, "Color Universal Design" (2008), darkened for day and lightened for night until text in
 * the colour meets WCAG 2.2 AA on our grounds. The values stand in src/app.css as --series-0 to --series-7.
 */
export type Shift = 'day' | 'night';

export type Marker =
	'circle' | 'square' | 'triangle' | 'diamond' | 'triangleDown' | 'cross' | 'pentagon' | 'bar';

export interface SeriesStyle {
	colour: string;
	/** The same colour as a custom property, for SVG and CSS that follow the shift by themselves. */
	cssVar: string;
	marker: Marker;
	/** Drawn by its stroke alone. */
	stroked: boolean;
	/** Canvas and SVG dash pattern in px; empty for a full line. */
	dash: number[];
	/** In words, for a person who reads it aloud. */
	words: string;
}

const COLOURS: Record<Shift, readonly string[]> = {
	day: ['#0069a4', '#b04600', '#007050', '#8e4a7b', '#7d5a00', '#0b7285', '#64640a', '#4a4f4e'],
	night: ['#5fb3e6', '#f08a4b', '#4cc7a0', '#d79bc4', '#e6b23c', '#9adbe8', '#d9d25a', '#c9d0cc']
};
const NAMES = ['blue', 'vermilion', 'green', 'purple', 'ochre', 'teal', 'olive', 'grey'] as const;
const MARKERS: readonly Marker[] = [
	'circle',
	'square',
	'triangle',
	'diamond',
	'triangleDown',
	'cross',
	'pentagon',
	'bar'
];
const DASHES: readonly number[][] = [
	[],
	[9, 4],
	[2, 4],
	[12, 4, 2, 4],
	[5, 3],
	[14, 5],
	[2, 3, 7, 3],
	[1, 3]
];

export const SERIES_COUNT = COLOURS.day.length;

/** Style of one slot; beyond eight the colours come round again with another marker and dash. */
export function seriesStyle(index: number, shift: Shift = 'day'): SeriesStyle {
	const slot = ((index % SERIES_COUNT) + SERIES_COUNT) % SERIES_COUNT;
	const round = Math.floor(Math.max(0, index) / SERIES_COUNT);
	const look = (slot + round) % SERIES_COUNT;
	const marker = MARKERS[look];
	return {
		colour: COLOURS[shift][slot],
		cssVar: `var(--series-${slot})`,
		marker,
		stroked: marker === 'cross' || marker === 'bar',
		dash: [...DASHES[look]],
		words: `${NAMES[slot]} ${marker === 'triangleDown' ? 'inverted triangle' : marker}`
	};
}

/** Outline of a marker of about the same visual weight, centred on 0, 0. */
export function markerPath(marker: Marker, r: number): string {
	const f = (n: number) => Math.round(n * 100) / 100;
	switch (marker) {
		case 'circle':
			return `M${f(-r)} 0A${f(r)} ${f(r)} 0 1 0 ${f(r)} 0A${f(r)} ${f(r)} 0 1 0 ${f(-r)} 0Z`;
		case 'square': {
			const a = f(r * 0.9);
			return `M${-a} ${-a}H${a}V${a}H${-a}Z`;
		}
		case 'triangle':
			return `M0 ${f(-r * 1.15)}L${f(r * 1.08)} ${f(r * 0.8)}H${f(-r * 1.08)}Z`;
		case 'triangleDown':
			return `M0 ${f(r * 1.15)}L${f(r * 1.08)} ${f(-r * 0.8)}H${f(-r * 1.08)}Z`;
		case 'diamond':
			return `M0 ${f(-r * 1.2)}L${f(r * 1.2)} 0L0 ${f(r * 1.2)}L${f(-r * 1.2)} 0Z`;
		case 'cross': {
			const a = f(r * 0.85);
			return `M${-a} ${-a}L${a} ${a}M${-a} ${a}L${a} ${-a}`;
		}
		case 'pentagon': {
			const points = Array.from({ length: 5 }, (_, i) => {
				const angle = (i / 5) * 2 * Math.PI - Math.PI / 2;
				return `${f(r * 1.1 * Math.cos(angle))} ${f(r * 1.1 * Math.sin(angle))}`;
			});
			return `M${points.join('L')}Z`;
		}
		case 'bar':
			return `M${f(-r)} 0H${f(r)}`;
	}
}

/** The slot for a new species: the first that no other species holds. */
export function freeSeries(taken: readonly (number | undefined)[]): number {
	let slot = 0;
	while (taken.includes(slot)) slot++;
	return slot;
}

/** The slot of a species: the one it was given, else its place in the scheme. */
export const seriesOf = (species: { series?: number | undefined }, place: number): number =>
	species.series ?? place;

/** What a chart shows. Numbers are in the units of the axes; the chart converts nothing. */
export interface ChartPoint {
	x: number;
	y: number;
	/** Half length of the error bar (one standard error). */
	error?: number;
	/** The value is only known to lie below `y` (limit of quantitation or detection). */
	below?: boolean;
	/** Left out of the fit, with a reason; drawn muted. */
	excluded?: boolean;
	/** Sample label or cell, for the table. */
	label?: string;
}

export interface ChartBand {
	x: ArrayLike<number>;
	low: ArrayLike<number>;
	high: ArrayLike<number>;
}

export interface ChartSeries {
	/** Species symbol. */
	id: string;
	label: string;
	/** Slot in the series table: colour, marker and dash. */
	index: number;
	curve?: { x: ArrayLike<number>; y: ArrayLike<number> };
	points?: ChartPoint[];
	/** 95 % confidence band of the curve. */
	confidence?: ChartBand;
	/** 95 % prediction band of a new sample. */
	prediction?: ChartBand;
}

/** A vertical line with words. */
export interface ChartMark {
	x: number;
	label: string;
}

export interface ChartAxis {
	label: string;
	unit: string;
}

export interface Palette {
	paper: string;
	card: string;
	ink: string;
	soft: string;
	rule: string;
	hair: string;
	amber: string;
	series: string[];
}

export function readPalette(root: Element): Palette {
	const style = getComputedStyle(root);
	const token = (name: string) => style.getPropertyValue(`--${name}`).trim();
	return {
		paper: token('paper'),
		card: token('card'),
		ink: token('ink'),
		soft: token('soft'),
		rule: token('rule'),
		hair: token('hair'),
		amber: token('amber'),
		series: Array.from({ length: 8 }, (_, i) => token(`series-${i}`))
	};
}

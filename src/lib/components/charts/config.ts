import type { ChartConfiguration, ChartDataset } from 'chart.js';
import { significant } from '$lib/client/numbers';
import { FONT, type Layer } from './drawing';
import { extent, roundUp } from './geometry';
import { seriesStyle } from './series';
import type { ChartBand, ChartSeries } from './types';

export interface ViewOptions {
	logX: boolean;
	logY: boolean;
	confidence: boolean;
	prediction: boolean;
	/** Room at the right for the labels at the end of the lines. */
	labelRoom: number;
	/** A residual plot has zero in its middle. */
	symmetric?: boolean;
	xMax?: number;
}

type Line = ChartDataset<'scatter', { x: number; y: number }[]>;

const pairs = (x: ArrayLike<number>, y: ArrayLike<number>) =>
	Array.from({ length: x.length }, (_, i) => ({ x: x[i], y: y[i] }));

const withAlpha = (hex: string, alpha: number) =>
	`${hex}${Math.round(alpha * 255)
		.toString(16)
		.padStart(2, '0')}`;

const base = { type: 'scatter', showLine: true, pointRadius: 0, pointHitRadius: 0 } as const;

function bandLines(band: ChartBand, colour: string, alpha: number, edge: number[] | null): Line[] {
	const line = {
		...base,
		borderColor: edge ? withAlpha(colour, 0.5) : 'transparent',
		borderWidth: edge ? 1 : 0,
		borderDash: edge ?? undefined,
		order: 3
	};
	return [
		{ ...line, data: pairs(band.x, band.high), fill: '+1', backgroundColor: withAlpha(colour, alpha) },
		{ ...line, data: pairs(band.x, band.low), fill: false }
	];
}

function linesOf(s: ChartSeries, colour: string, view: ViewOptions): Line[] {
	const lines: Line[] = [];
	if (s.prediction && view.prediction) lines.push(...bandLines(s.prediction, colour, 0.09, [4, 3]));
	if (s.confidence && view.confidence) lines.push(...bandLines(s.confidence, colour, 0.2, null));
	if (s.curve)
		lines.push({
			...base,
			data: pairs(s.curve.x, s.curve.y),
			borderColor: colour,
			borderWidth: 2.2,
			borderDash: seriesStyle(s.index).dash,
			fill: false,
			order: 1
		});
	return lines;
}

function everyValue(series: ChartSeries[], axis: 'x' | 'y', view: ViewOptions): ArrayLike<number>[] {
	return series.flatMap((s) => {
		const lists: ArrayLike<number>[] = [];
		if (s.curve) lists.push(s.curve[axis]);
		if (s.points?.length) lists.push(s.points.map((p) => p[axis] + (axis === 'y' ? (p.error ?? 0) : 0)));
		if (axis === 'y' && view.prediction && s.prediction) lists.push(s.prediction.high, s.prediction.low);
		if (axis === 'y' && view.confidence && s.confidence) lists.push(s.confidence.high, s.confidence.low);
		return lists;
	});
}

function yRange(series: ChartSeries[], view: ViewOptions): { min: number; max: number } {
	const all = extent(everyValue(series, 'y', view), view.logY);
	if (!all) return view.logY ? { min: 1e-4, max: 1 } : { min: 0, max: 1 };
	const [low, high] = all;
	if (view.symmetric) {
		const size = roundUp(Math.max(Math.abs(low), Math.abs(high)) * 1.08);
		return { min: -size, max: size };
	}
	if (view.logY) {
		const top = roundUp(high);
		return { min: Math.max(low * 0.8, top * 1e-6), max: top };
	}
	// A curve that ends a hair below zero by rounding must not tip the axis.
	const min = low < -0.02 * high ? -roundUp(-low) : 0;
	return { min, max: roundUp(high) };
}

function xRange(series: ChartSeries[], view: ViewOptions): { min: number; max: number } {
	const all = extent(everyValue(series, 'x', view), view.logX);
	if (!all) return view.logX ? { min: 0.01, max: 1 } : { min: 0, max: view.xMax ?? 1 };
	const curveEnd = extent(series.flatMap((s) => (s.curve ? [s.curve.x] : [])));
	const max = view.xMax ?? (curveEnd && curveEnd[1] >= all[1] ? curveEnd[1] : roundUp(all[1]));
	return view.logX ? { min: all[0], max } : { min: Math.min(0, all[0]), max };
}

const tickText = (value: string | number, log: boolean): string => {
	const n = Number(value);
	if (!log) return String(Number(n.toPrecision(6))).replace('-', '−');
	const mantissa = n / 10 ** Math.floor(Math.log10(n) + 1e-9);
	return [1, 2, 5].some((m) => Math.abs(mantissa - m) < 1e-6) ? significant(n, 1) : '';
};

/** The whole configuration for Chart.js: lines and bands; everything else is drawn by the layer. */
export function chartConfig(layer: Layer, view: ViewOptions): ChartConfiguration<'scatter'> {
	const { palette } = layer;
	const ticks = (log: boolean) => ({
		color: palette.soft,
		font: { family: FONT, size: 11.5 },
		padding: 6,
		maxRotation: 0,
		autoSkipPadding: 14,
		callback: (value: string | number) => tickText(value, log)
	});
	return {
		type: 'scatter',
		data: {
			datasets: layer.series.flatMap((s) => linesOf(s, palette.series[s.index % 8], view))
		},
		options: {
			animation: false,
			responsive: true,
			maintainAspectRatio: false,
			events: [],
			parsing: false,
			normalized: true,
			layout: { padding: { top: 30, right: view.labelRoom, left: 0, bottom: 0 } },
			scales: {
				x: {
					type: view.logX ? 'logarithmic' : 'linear',
					...xRange(layer.series, view),
					grid: { drawOnChartArea: false, tickColor: palette.ink, tickLength: 5 },
					border: { color: palette.ink },
					ticks: ticks(view.logX)
				},
				y: {
					type: view.logY ? 'logarithmic' : 'linear',
					...yRange(layer.series, view),
					grid: { color: palette.hair, drawTicks: false },
					border: { display: false },
					ticks: ticks(view.logY)
				}
			},
			plugins: { legend: { display: false }, tooltip: { enabled: false } }
		}
	};
}

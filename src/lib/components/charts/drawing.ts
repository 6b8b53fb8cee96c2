import type { Chart, Plugin } from 'chart.js';
import { significant } from '$lib/client/numbers';
import { spreadLabels } from './geometry';
import { markerPath, seriesStyle } from './series';
import type { ChartAxis, ChartMark, ChartSeries, Palette } from './types';

/** What our own layer draws over the lines; the chart keeps one and the page exchanges its content. */
export interface Layer {
	series: ChartSeries[];
	marks: ChartMark[];
	palette: Palette;
	x: ChartAxis;
	y: ChartAxis;
	/** Where the readout stands; null while nobody asks. */
	at: number | null;
	endLabels: boolean;
}

export const FONT = 'Lexend, sans-serif';
export const LABEL_GAP = 16;

export interface EndLabel {
	text: string;
	value: string;
	x: number;
	y: number;
	lineY: number;
	colour: string;
}

/** Value at the end of a line, to a thousandth of a linear axis; three digits on a logarithmic one. */
export function endValue(value: number, axisMax: number, logarithmic: boolean): string {
	if (logarithmic || !(axisMax > 0)) return significant(value, 3);
	const decimals = Math.max(0, 2 - Math.floor(Math.log10(axisMax)));
	if (decimals > 5) return significant(value, 3);
	const text = value.toFixed(decimals);
	return Number(text) === 0 ? text.replace('-', '') : text.replace('-', '−');
}

/** Place of the label at the end of each line, with no two over each other. */
export function endLabels(chart: Chart, layer: Layer): EndLabel[] {
	const { x, y } = chart.scales;
	const ends = layer.series
		.map((s) => {
			const last = s.curve ? s.curve.x.length - 1 : -1;
			const tail = s.points?.filter((p) => !p.excluded).at(-1);
			const end = last >= 0 ? { x: s.curve!.x[last], y: s.curve!.y[last] } : tail;
			return { s, end };
		})
		.filter((e): e is { s: ChartSeries; end: { x: number; y: number } } => e.end !== undefined);
	const inside = (py: number) =>
		Math.max(
			chart.chartArea.top,
			Math.min(chart.chartArea.bottom, Number.isFinite(py) ? py : chart.chartArea.bottom)
		);
	const lines = ends.map((e) => inside(y.getPixelForValue(e.end.y)));
	const placed = spreadLabels(lines, LABEL_GAP, chart.chartArea.top, chart.chartArea.bottom);
	return ends.map((e, i) => ({
		text: e.s.label,
		value: endValue(e.end.y, y.max, chart.options.scales?.y?.type === 'logarithmic'),
		x: Math.min(chart.chartArea.right, x.getPixelForValue(e.end.x)) + 12,
		y: placed[i],
		lineY: lines[i],
		colour: layer.palette.series[e.s.index % 8]
	}));
}

/** Whether a place lies on the plot; what lies outside is not drawn over the labels. */
export const inPlot = ({ chartArea: a }: Chart, px: number, py: number): boolean =>
	px >= a.left - 1 && px <= a.right + 1 && py >= a.top - 1 && py <= a.bottom + 1;

function drawPoints(chart: Chart, layer: Layer) {
	const { ctx } = chart;
	const { x, y } = chart.scales;
	for (const s of layer.series) {
		const style = seriesStyle(s.index);
		const colour = layer.palette.series[s.index % 8];
		const path = new Path2D(markerPath(style.marker, 4.8));
		for (const p of s.points ?? []) {
			const px = x.getPixelForValue(p.x);
			const py = y.getPixelForValue(p.y);
			if (!inPlot(chart, px, py)) continue;
			ctx.save();
			ctx.globalAlpha = p.excluded ? 0.4 : 1;
			ctx.strokeStyle = colour;
			ctx.lineWidth = 1.8;
			if (p.error && p.error > 0 && !p.below) {
				const up = y.getPixelForValue(p.y + p.error);
				const down = y.getPixelForValue(p.y - p.error);
				ctx.beginPath();
				ctx.moveTo(px, up);
				ctx.lineTo(px, Number.isFinite(down) ? down : chart.chartArea.bottom);
				ctx.lineWidth = 1.2;
				ctx.stroke();
			}
			ctx.translate(px, py);
			if (p.below) drawBelow(ctx);
			else {
				ctx.fillStyle = layer.palette.card;
				ctx.fill(path);
				ctx.lineWidth = 1.8;
				ctx.stroke(path);
			}
			if (p.excluded) {
				ctx.beginPath();
				ctx.moveTo(-6, 6);
				ctx.lineTo(6, -6);
				ctx.stroke();
			}
			ctx.restore();
		}
	}
}

/** A bar at the limit with an arrow down: the value lies somewhere below. */
function drawBelow(ctx: CanvasRenderingContext2D) {
	ctx.beginPath();
	ctx.moveTo(-5, 0);
	ctx.lineTo(5, 0);
	ctx.moveTo(0, 0);
	ctx.lineTo(0, 9);
	ctx.moveTo(-3, 6);
	ctx.lineTo(0, 9.5);
	ctx.lineTo(3, 6);
	ctx.stroke();
}

function drawEndLabels(chart: Chart, layer: Layer) {
	const { ctx } = chart;
	for (const label of endLabels(chart, layer)) {
		ctx.save();
		ctx.fillStyle = label.colour;
		ctx.strokeStyle = label.colour;
		if (Math.abs(label.y - label.lineY) > 3) {
			ctx.globalAlpha = 0.6;
			ctx.lineWidth = 1;
			ctx.beginPath();
			ctx.moveTo(label.x - 10, label.lineY);
			ctx.lineTo(label.x - 2, label.y);
			ctx.stroke();
			ctx.globalAlpha = 1;
		}
		ctx.textBaseline = 'middle';
		ctx.font = `600 13px ${FONT}`;
		ctx.fillText(label.text, label.x, label.y);
		const width = ctx.measureText(label.text).width;
		ctx.font = `400 11.5px ${FONT}`;
		ctx.fillText(label.value, label.x + width + 6, label.y);
		ctx.restore();
	}
}

function drawMarks(chart: Chart, layer: Layer) {
	const { ctx, chartArea } = chart;
	layer.marks.forEach((mark, i) => {
		const px = chart.scales.x.getPixelForValue(mark.x);
		if (!(px >= chartArea.left) || px > chartArea.right) return;
		ctx.save();
		ctx.strokeStyle = layer.palette.amber;
		ctx.fillStyle = layer.palette.amber;
		ctx.setLineDash([3, 3]);
		ctx.lineWidth = 1.2;
		ctx.beginPath();
		ctx.moveTo(px, chartArea.top);
		ctx.lineTo(px, chartArea.bottom);
		ctx.stroke();
		ctx.font = `500 12px ${FONT}`;
		ctx.textBaseline = 'top';
		const right = px + 7 + ctx.measureText(mark.label).width < chart.width - 4;
		ctx.textAlign = right ? 'left' : 'right';
		const [x, y] = [px + (right ? 7 : -7), chartArea.top + 2 + (i % 4) * 16];
		// A rim of paper keeps the words apart from the curves that they cross.
		ctx.setLineDash([]);
		ctx.strokeStyle = layer.palette.card;
		ctx.lineWidth = 5;
		ctx.lineJoin = 'round';
		ctx.strokeText(mark.label, x, y);
		ctx.fillText(mark.label, x, y);
		ctx.restore();
	});
}

function drawUnits(chart: Chart, layer: Layer) {
	const { ctx, chartArea } = chart;
	ctx.save();
	ctx.fillStyle = layer.palette.soft;
	ctx.font = `400 11.5px ${FONT}`;
	ctx.textBaseline = 'bottom';
	ctx.textAlign = 'left';
	ctx.fillText(layer.y.unit, 2, chartArea.top - 9);
	ctx.textBaseline = 'top';
	ctx.textAlign = 'left';
	ctx.fillText(layer.x.unit, chartArea.right + 22, chartArea.bottom + 11);
	ctx.restore();
}

function drawReadoutLine(chart: Chart, layer: Layer) {
	if (layer.at === null) return;
	const { ctx, chartArea } = chart;
	const px = chart.scales.x.getPixelForValue(layer.at);
	if (!(px >= chartArea.left) || px > chartArea.right) return;
	ctx.save();
	ctx.strokeStyle = layer.palette.ink;
	ctx.lineWidth = 1;
	ctx.beginPath();
	ctx.moveTo(px, chartArea.top);
	ctx.lineTo(px, chartArea.bottom);
	ctx.stroke();
	ctx.restore();
}

/** The plugin that draws points, end labels, marks, units and the readout line of `layer()`. */
export const layerPlugin = (layer: () => Layer): Plugin => ({
	id: 'layer',
	afterDatasetsDraw(chart) {
		const current = layer();
		drawMarks(chart, current);
		drawPoints(chart, current);
		if (current.endLabels) drawEndLabels(chart, current);
		drawUnits(chart, current);
		drawReadoutLine(chart, current);
	}
});

/** Room that the labels need at the right of the plot. */
export function labelRoom(ctx: CanvasRenderingContext2D, layer: Layer): number {
	if (!layer.endLabels) return 34;
	ctx.save();
	ctx.font = `600 13px ${FONT}`;
	const widest = Math.max(0, ...layer.series.map((s) => ctx.measureText(s.label).width));
	ctx.restore();
	return Math.min(150, widest + 62);
}

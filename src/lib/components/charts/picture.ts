import type { Chart } from 'chart.js';
import { endLabels, FONT, inPlot, type Layer } from './drawing';
import { markerPath, seriesStyle } from './series';
import type { ChartBand } from './types';

/** What is written under a saved picture. */
export interface Caption {
	title: string;
	/** Record and version: "HX-14 ring closure, scheme 1, version 4". */
	record: string;
	/** When the picture was made, with the zone. */
	date: string;
}

const escape = (text: string): string => text.replace(/[&<>"']/g, (c) => `&#${c.charCodeAt(0)};`);
const f = (n: number): string => String(Math.round(n * 100) / 100);

const FOOT = 46;

function words(x: number, y: number, text: string, fill: string, more = ''): string {
	return `<text x="${f(x)}" y="${f(y)}" fill="${fill}" font-size="11.5" ${more}>${escape(text)}</text>`;
}

function axes(chart: Chart, layer: Layer): string {
	const { left, right, top, bottom } = chart.chartArea;
	const { palette } = layer;
	const { x, y } = chart.scales;
	let out = '';
	for (const tick of y.ticks) {
		const py = y.getPixelForValue(tick.value);
		const label = Array.isArray(tick.label) ? tick.label.join(' ') : (tick.label ?? '');
		out += `<line x1="${f(left)}" x2="${f(right)}" y1="${f(py)}" y2="${f(py)}" stroke="${palette.hair}"/>`;
		out += words(left - 8, py + 4, label, palette.soft, 'text-anchor="end"');
	}
	for (const tick of x.ticks) {
		const px = x.getPixelForValue(tick.value);
		const label = Array.isArray(tick.label) ? tick.label.join(' ') : (tick.label ?? '');
		out += `<line x1="${f(px)}" x2="${f(px)}" y1="${f(bottom)}" y2="${f(bottom + 5)}" stroke="${palette.ink}"/>`;
		out += words(px, bottom + 19, label, palette.soft, 'text-anchor="middle"');
	}
	out += `<line x1="${f(left)}" x2="${f(right)}" y1="${f(bottom)}" y2="${f(bottom)}" stroke="${palette.ink}"/>`;
	out += words(2, top - 8, layer.y.unit, palette.soft);
	return out + words(right + 22, bottom + 20, layer.x.unit, palette.soft);
}

function path(chart: Chart, xs: ArrayLike<number>, ys: ArrayLike<number>): string {
	const { x, y } = chart.scales;
	let out = '';
	for (let i = 0; i < xs.length; i++) {
		const px = x.getPixelForValue(xs[i]);
		const py = y.getPixelForValue(ys[i]);
		if (Number.isFinite(px) && Number.isFinite(py)) out += `${out ? 'L' : 'M'}${f(px)} ${f(py)}`;
	}
	return out;
}

function band(chart: Chart, b: ChartBand, colour: string, opacity: number): string {
	const back = { x: Array.from(b.x).reverse(), y: Array.from(b.low).reverse() };
	const upper = path(chart, b.x, b.high);
	const lower = path(chart, back.x, back.y).replace(/^M/, 'L');
	return `<path d="${upper}${lower}Z" fill="${colour}" opacity="${opacity}"/>`;
}

function seriesMarkup(
	chart: Chart,
	layer: Layer,
	bands: { confidence: boolean; prediction: boolean }
): string {
	const { x, y } = chart.scales;
	let out = '';
	for (const s of layer.series) {
		const style = seriesStyle(s.index);
		const colour = layer.palette.series[s.index % 8];
		if (s.prediction && bands.prediction) out += band(chart, s.prediction, colour, 0.1);
		if (s.confidence && bands.confidence) out += band(chart, s.confidence, colour, 0.22);
		if (s.curve)
			out += `<path d="${path(chart, s.curve.x, s.curve.y)}" fill="none" stroke="${colour}" stroke-width="2.2" stroke-dasharray="${style.dash.join(' ')}"/>`;
		for (const p of s.points ?? []) {
			const [px, py] = [x.getPixelForValue(p.x), y.getPixelForValue(p.y)];
			if (!inPlot(chart, px, py)) continue;
			const at = `translate(${f(px)} ${f(py)})`;
			const d = p.below ? 'M-5 0H5M0 0V9M-3 6L0 9.5L3 6' : markerPath(style.marker, 4.8);
			if (p.error && !p.below) {
				const half = Math.abs(y.getPixelForValue(p.y + p.error) - y.getPixelForValue(p.y));
				out += `<path transform="${at}" d="M0 ${f(-half)}V${f(half)}" stroke="${colour}" stroke-width="1.2"/>`;
			}
			out += `<path transform="${at}" d="${d}" fill="${p.below ? 'none' : layer.palette.card}" stroke="${colour}" stroke-width="1.8" opacity="${p.excluded ? 0.4 : 1}"/>`;
		}
	}
	return out;
}

/** The chart as it stands on the screen, as an SVG document with its caption. */
export function chartSvg(
	chart: Chart,
	layer: Layer,
	caption: Caption,
	bands: { confidence: boolean; prediction: boolean }
): string {
	const { width, height, chartArea } = chart;
	const { palette } = layer;
	let body = axes(chart, layer) + seriesMarkup(chart, layer, bands);
	layer.marks.forEach((mark, i) => {
		const px = chart.scales.x.getPixelForValue(mark.x);
		body += `<line x1="${f(px)}" x2="${f(px)}" y1="${f(chartArea.top)}" y2="${f(chartArea.bottom)}" stroke="${palette.amber}" stroke-dasharray="3 3"/>`;
		body += words(px + 7, chartArea.top + 12 + (i % 4) * 16, mark.label, palette.amber);
	});
	if (layer.endLabels)
		for (const label of endLabels(chart, layer))
			body += `<text x="${f(label.x)}" y="${f(label.y + 4)}" fill="${label.colour}" font-size="13" font-weight="600">${escape(label.text)} <tspan font-weight="400" font-size="11.5">${escape(label.value)}</tspan></text>`;
	body += words(12, height + 18, caption.title, palette.ink, 'font-weight="600"');
	body += words(12, height + 34, `${caption.record} · ${caption.date}`, palette.soft);
	return `<svg xmlns="http://www.w3.org/2000/svg" width="${width}" height="${height + FOOT}" viewBox="0 0 ${width} ${height + FOOT}" font-family="Lexend, sans-serif"><title>${escape(caption.title)}</title><desc>${escape(`${caption.record}, ${caption.date}`)}</desc><rect width="100%" height="100%" fill="${palette.card}"/>${body}</svg>\n`;
}

/** The same as PNG, in the resolution of the screen and at least twice the CSS pixel. */
export function chartPng(chart: Chart, layer: Layer, caption: Caption): Promise<Blob> {
	const scale = Math.max(1, chart.canvas.width / chart.width);
	const canvas = document.createElement('canvas');
	canvas.width = chart.canvas.width;
	canvas.height = chart.canvas.height + FOOT * scale;
	const ctx = canvas.getContext('2d');
	if (!ctx) return Promise.reject(new Error('The browser offers no canvas.'));
	ctx.fillStyle = layer.palette.card;
	ctx.fillRect(0, 0, canvas.width, canvas.height);
	ctx.drawImage(chart.canvas, 0, 0);
	ctx.scale(scale, scale);
	ctx.fillStyle = layer.palette.ink;
	ctx.font = `600 11.5px ${FONT}`;
	ctx.fillText(caption.title, 12, chart.height + 18);
	ctx.fillStyle = layer.palette.soft;
	ctx.font = `400 11.5px ${FONT}`;
	ctx.fillText(`${caption.record} · ${caption.date}`, 12, chart.height + 34);
	return new Promise((resolve, reject) =>
		canvas.toBlob(
			(blob) => (blob ? resolve(blob) : reject(new Error('The picture could not be made.'))),
			'image/png'
		)
	);
}

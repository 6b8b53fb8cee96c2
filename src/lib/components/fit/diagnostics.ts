/**
 * Residuals of a fit arranged to be looked at: against time, prediction, run, species, and normal scores.
 *
 * Normal scores: Φ⁻¹((i − 3/8)/(n + 1/4)); source: G. Blom, Statistical Estimates and Transformed Beta-Variables, Wiley 1958.
 */
import { normalQuantile } from '$lib/kinetics/fit/distributions';
import type { FitReport, FitRequest, FitResidual } from '$lib/schemas/fit';
import { plain, significant, unitText } from '$lib/client/numbers';
import { rowNumber } from '../data/point-rows';
import { sourceWords } from '../data/quantities';
import { channelSlot } from './panels';

/** Beyond this a studentised residual is marked. */
export const LARGE = 3;

export type Arrangement = 'time' | 'prediction' | 'run' | 'species' | 'normal';

export interface PlotPoint {
	x: number;
	y: number;
	/** Slot of the species in the series table. */
	index: number;
	large: boolean;
	/** Words for a reader and for the pointer. */
	words: string;
	/** The run's page, at its row. */
	href: string | null;
}

export interface ResidualPlotData {
	points: PlotPoint[];
	x: { label: string; unit: string };
	/** Names of the places on the x axis where it has no numbers. */
	categories: string[] | null;
	/** Slots with the species they stand for. */
	legend: { label: string; index: number }[];
	/** Whether the line y = x belongs into the plot. */
	diagonal: boolean;
}

export interface DiagnosticContext {
	request: FitRequest;
	runNames: Record<string, string>;
	/** Page of a run's row (as `sheetRow` names it); null where there is none. */
	hrefOf: (run: string, row: number) => string | null;
}

/** The row of the sheet that a value came from, as the run's page shows it; counted from one where no sheet is behind it. */
export function sheetRow(request: FitRequest, run: string, index: number): number {
	const at = request.runs.findIndex((r, i) => (r.id ?? `r${i + 1}`) === run);
	const point = request.runs[at]?.timepoints[index];
	return point ? rowNumber(point, index) : index + 1;
}

/** "row 9", or "column D" of a sheet whose times run across. */
export function sheetRowWords(request: FitRequest, run: string, index: number): string {
	const at = request.runs.findIndex((r, i) => (r.id ?? `r${i + 1}`) === run);
	const source = request.runs[at]?.timepoints[index]?.source;
	return source ? sourceWords(source) : `row ${index + 1}`;
}

interface Row extends FitResidual {
	studentised: number;
}

const SECONDS: Record<string, number> = { s: 1, min: 60, h: 3600, d: 86400 };

export const studentisedRows = (report: FitReport): Row[] =>
	report.residuals.filter((r): r is Row => r.studentised !== null && Number.isFinite(r.studentised));

export const largeRows = (report: FitReport): Row[] =>
	studentisedRows(report)
		.filter((r) => Math.abs(r.studentised) > LARGE)
		.sort((a, b) => Math.abs(b.studentised) - Math.abs(a.studentised));

function unitOfTime(rows: Row[]): string {
	const units = new Set(rows.map((r) => r.timeUnit));
	return units.size === 1 ? [...units][0] : 'h';
}

/** Spreads the points of one place a little, in order, so that they do not hide each other. */
const spread = (place: number, rank: number, count: number): number =>
	place + (count < 2 ? 0 : 0.5 * (rank / (count - 1) - 0.5));

export function normalScores(count: number): number[] {
	return Array.from({ length: count }, (_, i) => normalQuantile((i + 1 - 0.375) / (count + 0.25)));
}

function abscissae(rows: Row[], how: Arrangement, categories: string[]): number[] {
	const unit = SECONDS[unitOfTime(rows)];
	if (how === 'time') return rows.map((r) => (r.time * SECONDS[r.timeUnit]) / unit);
	if (how === 'prediction') return rows.map((r) => r.predicted);
	if (how === 'normal') {
		const order = rows.map((_, i) => i).sort((a, b) => rows[a].studentised - rows[b].studentised);
		const scores = normalScores(rows.length);
		const out = new Array<number>(rows.length);
		order.forEach((i, rank) => (out[i] = scores[rank]));
		return out;
	}
	const key = (r: Row) => (how === 'run' ? r.run : r.channel);
	const seen = new Map<string, number>();
	return rows.map((r) => {
		const rank = seen.get(key(r)) ?? 0;
		seen.set(key(r), rank + 1);
		return spread(categories.indexOf(key(r)), rank, rows.filter((o) => key(o) === key(r)).length);
	});
}

function axisOf(how: Arrangement, rows: Row[], request: FitRequest): ResidualPlotData['x'] {
	const units = new Set(request.runs.flatMap((r) => r.channels.map((c) => c.unit)));
	if (how === 'time') return { label: 'elapsed time', unit: unitOfTime(rows) };
	if (how === 'prediction') return { label: 'fitted value', unit: units.size === 1 ? [...units][0] : '' };
	if (how === 'normal') return { label: 'normal score', unit: '' };
	return { label: how, unit: '' };
}

export function residualPlot(
	report: FitReport,
	how: Arrangement,
	context: DiagnosticContext
): ResidualPlotData {
	const { request, runNames, hrefOf } = context;
	const rows = studentisedRows(report);
	const channels = [...new Map(request.runs.flatMap((r) => r.channels).map((c) => [c.id, c])).values()];
	const slots = new Map(channels.map((c) => [c.id, channelSlot(c, request.species)]));
	const label = (id: string) => channels.find((c) => c.id === id)?.label ?? id;
	const keys = how === 'run' ? request.runs.map((r, i) => r.id ?? `r${i + 1}`) : channels.map((c) => c.id);
	const xs = abscissae(rows, how, keys);
	const used = new Set(rows.map((r) => r.channel));
	return {
		points: rows.map((r, i) => ({
			x: xs[i],
			y: r.studentised,
			index: slots.get(r.channel) ?? 0,
			large: Math.abs(r.studentised) > LARGE,
			words: `${label(r.channel)}, ${runNames[r.run] ?? r.run}, ${plain(r.time)} ${r.timeUnit}: studentised residual ${significant(r.studentised, 2)}`,
			href: hrefOf(r.run, sheetRow(request, r.run, r.index))
		})),
		x: axisOf(how, rows, request),
		categories:
			how === 'run' ? keys.map((k) => runNames[k] ?? k) : how === 'species' ? keys.map(label) : null,
		legend: channels
			.filter((c) => used.has(c.id))
			.map((c) => ({ label: label(c.id), index: slots.get(c.id) ?? 0 })),
		diagonal: how === 'normal'
	};
}

/** Four to six round marks that span the values. */
export function roundTicks(low: number, high: number, wanted = 5): number[] {
	if (!(high > low)) return [low];
	const raw = (high - low) / wanted;
	const unit = 10 ** Math.floor(Math.log10(raw));
	const step = [1, 2, 2.5, 5, 10].map((m) => m * unit).find((s) => s >= raw) ?? raw;
	const ticks: number[] = [];
	for (let k = Math.ceil(low / step - 1e-9); k * step <= high + 1e-9 * step; k++)
		ticks.push(Number((k * step).toPrecision(12)));
	return ticks;
}

export const withUnit = (value: number, unit: string, digits = 3): string =>
	`${significant(value, digits)}${unit && unit !== '1' ? ` ${unitText(unit)}` : ''}`;

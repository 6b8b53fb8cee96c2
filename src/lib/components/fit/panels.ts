/** From a fit's report to what its charts show: one panel a run. */
import type { Prediction } from '$lib/kinetics/fit';
import type { FitReport, FitRequest, FitResidual } from '$lib/schemas/fit';
import type { ChannelContent, RunContent } from '$lib/schemas/run';
import type { SpeciesContent } from '$lib/schemas/scheme';
import { toSi } from '$lib/kinetics/units';
import { plain, unitText } from '$lib/client/numbers';
import type { ChartPoint, ChartSeries } from '../charts/types';

export interface FitPanel {
	/** Id of the run within the request. */
	run: string;
	name: string;
	temperature: string;
	timeUnit: string;
	quantity: string;
	unit: string;
	lastTime: number;
	series: ChartSeries[];
	residuals: ChartSeries[];
}

const CURVE_POINTS = 160;

/** The slot (colour, marker, dash) of a channel: that of its first species. */
export function channelSlot(channel: ChannelContent, species: readonly SpeciesContent[]): number {
	const first = Object.keys(channel.weights)[0] ?? channel.id;
	const index = species.findIndex((s) => s.id === first);
	return index < 0 ? species.length : (species[index].series ?? index);
}

export function measured(run: RunContent, channel: ChannelContent): ChartPoint[] {
	return run.timepoints.flatMap((point, index): ChartPoint[] => {
		const value = point.values[channel.id] ?? null;
		if (value === null) return [];
		const excluded = (run.exclusions ?? []).some(
			(e) => e.index === index && (e.channel === null || e.channel === channel.id)
		);
		const label = point.source?.cells?.[channel.id] ?? point.sampleId;
		const common = { x: point.time, excluded, label };
		if (typeof value === 'number') return [{ ...common, y: value }];
		return 'below' in value ? [{ ...common, y: value.below, below: true }] : [{ ...common, y: value.above }];
	});
}

const residualPoints = (residuals: FitResidual[]): ChartPoint[] =>
	residuals.flatMap((r) => (r.residual === null ? [] : [{ x: r.time, y: r.residual }]));

export function lastTimeOf(run: RunContent): number {
	return run.timepoints.reduce((last, p) => Math.max(last, p.time), 0);
}

/** Evenly spaced times from zero to the end. */
export const curveTimes = (end: number, count = CURVE_POINTS): number[] =>
	Array.from({ length: count }, (_, i) => (end * i) / (count - 1));

/** What belongs to one run of the request. */
interface PanelRun {
	run: RunContent;
	id: string;
	name: string;
	/** Undefined while the curves are not there yet: points and residuals need none. */
	curves: Prediction | undefined;
}

function panel(report: FitReport, request: FitRequest, { run, id, name, curves }: PanelRun): FitPanel {
	const lastTime = lastTimeOf(run);
	const times = curves?.times ?? [];
	const predicted = curves?.series.filter((s) => s.kind === 'channel') ?? [];
	const series = run.channels.map((channel): ChartSeries => {
		const band = predicted.find((b) => b.id === channel.id);
		return {
			id: channel.id,
			label: channel.label ?? channel.id,
			index: channelSlot(channel, request.species),
			...(band ? { curve: { x: times, y: band.curve } } : {}),
			points: measured(run, channel),
			...(band?.confidence
				? { confidence: { x: times, low: band.confidence[0], high: band.confidence[1] } }
				: {}),
			...(band?.prediction
				? { prediction: { x: times, low: band.prediction[0], high: band.prediction[1] } }
				: {})
		};
	});
	const residuals = series.map((s) => ({
		id: s.id,
		label: s.label,
		index: s.index,
		points: residualPoints(report.residuals.filter((r) => r.run === id && r.channel === s.id))
	}));
	return {
		run: id,
		name,
		temperature: `${plain(run.temperature.value)} ${unitText(run.temperature.unit)}`,
		timeUnit: run.timeUnit,
		quantity: run.channels[0]?.unit.includes('%') ? 'amount' : 'concentration',
		unit: run.channels[0]?.unit ?? '',
		lastTime,
		series,
		residuals
	};
}

export function fitPanels(
	report: FitReport,
	request: FitRequest,
	runNames: Record<string, string>,
	curvesOf: (run: string) => Prediction | undefined
): FitPanel[] {
	return request.runs.map((run, i) => {
		const id = run.id ?? `r${i + 1}`;
		return panel(report, request, { run, id, name: runNames[id] ?? id, curves: curvesOf(id) });
	});
}

/** Id of the run whose temperature is nearest to the reference temperature. */
export function nearestRun({ runs, referenceTemperature }: FitRequest): string {
	const gap = (run: RunContent) =>
		Math.abs(toSi(run.temperature, 'temperature') - toSi(referenceTemperature, 'temperature'));
	const nearest = runs.reduce((best, run, i) => (gap(run) < gap(runs[best]) ? i : best), 0);
	return runs[nearest].id ?? `r${nearest + 1}`;
}

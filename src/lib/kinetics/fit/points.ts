/**
 * Points of a run: which cells count, as a value or as a limit.
 *
 * A row at time zero counts only where its prediction depends on what is fitted (a charge, a time offset, the response factor
 * of a channel that sees the charge): with a fixed charge it says nothing about the constants and would only lower s.
 * Values below (above) a limit are kept as limits: they add to the misfit when the prediction lies beyond the limit.
 * Several injections of one sample count once, with their mean: their spread is the assay's, not the experiment's.
 */
import type { FitFinding, FitRequest } from '../../schemas/fit';
import type { AssayValue } from '../../schemas/run';
import type { RunModel } from './run-model';

export interface Point {
	run: number;
	channel: number;
	/** Row of the run's timepoints (the first one, for injections averaged). */
	index: number;
	/** Position in the run's `timesS`. */
	time: number;
	kind: 'value' | 'below' | 'above';
	/** The value or the limit, in the channel's unit. */
	observed: number;
	/** Standard deviation that the error model gives it, up to the common factor s. */
	sigma: number;
}

type Run = FitRequest['runs'][number];

function excluded(run: Run): (index: number, channel: string) => boolean {
	const rows = new Set<string>();
	for (const e of run.exclusions ?? []) rows.add(`${e.index}|${e.channel ?? '*'}`);
	return (index, channel) => rows.has(`${index}|*`) || rows.has(`${index}|${channel}`);
}

function countsAtZero(model: RunModel, channel: number, useTimeZeroRow: boolean | undefined): boolean {
	if (useTimeZeroRow !== undefined) return useTimeZeroRow;
	if (model.offset.terms.length > 0 || model.charge.some((c) => c.terms.length > 0)) return true;
	const { scaleFitted, species } = model.channels[channel];
	return scaleFitted && Array.from(species).some((i) => model.charge[i].constant !== 0);
}

function readCell(value: AssayValue | undefined): { kind: Point['kind']; observed: number } | null {
	if (value === null || value === undefined) return null;
	if (typeof value === 'number') return Number.isFinite(value) ? { kind: 'value', observed: value } : null;
	if ('below' in value) return { kind: 'below', observed: value.below };
	return { kind: 'above', observed: value.above };
}

/** Fills `model.points` and `model.timesS`. */
export function readPoints(
	run: Run,
	model: RunModel,
	useTimeZeroRow: boolean | undefined,
	issues: FitFinding[]
): void {
	const skip = excluded(run);
	const points: (Point & { recorded: number })[] = [];
	let zeroRows = 0;
	run.timepoints.forEach((row, index) => {
		for (const channel of Object.keys(row.values))
			if (!model.channels.some((c) => c.id === channel)) noteUnknownChannel(model, channel, issues);
		if (!Number.isFinite(row.time)) return;
		model.channels.forEach(({ id }, channel) => {
			const cell = readCell(Object.hasOwn(row.values, id) ? row.values[id] : undefined);
			if (!cell || skip(index, id)) return;
			if (row.time === 0 && !countsAtZero(model, channel, useTimeZeroRow)) {
				zeroRows++;
				return;
			}
			points.push({ run: model.index, channel, index, time: 0, sigma: 1, recorded: row.time, ...cell });
		});
	});
	if (zeroRows > 0) noteZeroRow(model, issues);
	checkTimes(model, points, issues);
	const kept = run.replicates === 'injections' ? averaged(points) : points;
	const times = [...new Set(kept.map((p) => p.recorded))].sort((a, b) => a - b);
	const position = new Map(times.map((t, i) => [t, i]));
	model.timesS = Float64Array.from(times, (t) => t * model.timeFactor);
	model.points = kept.map(({ recorded, ...point }) => ({ ...point, time: position.get(recorded)! }));
}

function averaged<T extends Point & { recorded: number }>(points: T[]): T[] {
	const groups = new Map<string, T[]>();
	for (const p of points) {
		const key = `${p.channel}|${p.recorded}|${p.kind}`;
		const group = groups.get(key);
		if (group) group.push(p);
		else groups.set(key, [p]);
	}
	return [...groups.values()].map((group) => ({
		...group[0],
		observed: group.reduce((a, p) => a + p.observed, 0) / group.length
	}));
}

function noteUnknownChannel(model: RunModel, channel: string, issues: FitFinding[]): void {
	if (issues.some((i) => i.code === 'channel-unknown' && i.message.includes(`"${channel}"`))) return;
	issues.push({
		code: 'channel-unknown',
		level: 'stop',
		message: `A timepoint of run ${model.id} has a value for "${channel}", which is not a channel of that run. Its channels are ${model.channels.map((c) => c.id).join(', ')}.`,
		runs: [model.id]
	});
}

function noteZeroRow(model: RunModel, issues: FitFinding[]): void {
	const known = issues.find((i) => i.code === 'time-zero-not-counted');
	if (known) {
		known.runs?.push(model.id);
		return;
	}
	issues.push({
		code: 'time-zero-not-counted',
		level: 'note',
		message: 'The row at time zero is not counted: with a fixed charge it says nothing about the constants.',
		runs: [model.id]
	});
}

function checkTimes(model: RunModel, points: { recorded: number }[], issues: FitFinding[]): void {
	if (points.some((p) => p.recorded < 0) && model.offset.terms.length === 0)
		issues.push({
			code: 'time-negative',
			level: 'stop',
			message: `Run ${model.id} has values at times before zero. Correct the times, or let a time offset be fitted.`,
			runs: [model.id]
		});
	if (points.length === 0)
		issues.push({
			code: 'run-empty',
			level: 'stop',
			message: `Run ${model.id} has no value that counts. Check its channels, exclusions and times.`,
			runs: [model.id]
		});
}

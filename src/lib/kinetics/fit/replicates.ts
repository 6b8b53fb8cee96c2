/**
 * Groups of points that are separate samples of the same thing: same conditions, same time, same signal.
 *
 * Only such groups measure the experiment's own scatter. Injections of one sample do not (they are averaged before).
 */
import type { FitRequest } from '../../schemas/fit';
import { isFitted } from '../../schemas/quantity';
import type { Point } from './points';
import type { RunModel } from './run-model';

function conditionsKey(request: FitRequest, run: RunModel): string {
	const given = request.runs[run.index];
	const amounts = Object.entries(given.initial)
		.map(([s, a]) => (isFitted(a) ? `${run.id}.${s}` : `${s}=${a.value}${a.unit}`))
		.sort();
	const excess = Object.entries(given.excess)
		.map(([s, q]) => `${s}=${q.value}${q.unit}`)
		.sort();
	const own = given.temperatureLog || given.timeOffset ? run.id : '';
	return [run.temperatureK, own, ...amounts, '|', ...excess].join(';');
}

function signalKey(run: RunModel, channel: number): string {
	const c = run.channels[channel];
	return `${Array.from(c.species).join()}|${Array.from(c.weights).join()}|${c.unit}|${JSON.stringify(c.lnResponse)}`;
}

/** Groups of at least two counted values. */
export function replicateGroups(request: FitRequest, runs: RunModel[]): Point[][] {
	const groups = new Map<string, Point[]>();
	for (const run of runs) {
		const conditions = conditionsKey(request, run);
		for (const point of run.points) {
			if (point.kind !== 'value') continue;
			const key = `${conditions}#${signalKey(run, point.channel)}#${run.timesS[point.time]}`;
			const group = groups.get(key);
			if (group) group.push(point);
			else groups.set(key, [point]);
		}
	}
	return [...groups.values()].filter((g) => g.length > 1);
}

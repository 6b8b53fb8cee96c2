/**
 * A run of one's own choosing under a fit's parameters: its conditions, any times, its channels and one channel for every
 * species. The estimated parameters and their order stay those of the request, so that a fit's estimates and covariance apply.
 */
import type { FitRequest } from '../../schemas/fit';
import { isFitted, type Fittable } from '../../schemas/quantity';
import type { RunContent } from '../../schemas/run';
import { isUnitOf, toSi } from '../units';
import { KineticModel } from './model';
import type { Point } from './points';
import { compileProblem, type KineticProblem } from './problem';
import { runId } from './slots';

/** Id of a run that is none of the request's; lengthened where a run of the request carries it. */
const PROBE = 'prediction';
const speciesChannel = (id: string) => `species ${id}`;

export interface Probe {
	problem: KineticProblem;
	/** Its points: every channel of the run, then every species, each at every time in the order given. */
	model: KineticModel;
	/** Position of the run in the problem. */
	at: number;
}

/**
 * @param known whether the fit has an estimate for this parameter id (amounts local to a run)
 * @param foreign the run is none of the request's, whatever its id: it takes nothing local from a run that happens to share it
 * @throws RangeError when an amount of the run is not known or the request cannot be compiled
 */
export function probeModel(
	request: FitRequest,
	run: RunContent,
	times: number[],
	known: (id: string) => boolean,
	foreign = false
): Probe {
	refuseLocal(request, run, foreign);
	const filled = probeRun(request, run, known, foreign);
	const problem = compileProbe(request, filled, times);
	const at = problem.runs.findIndex((r) => r.id === filled.id);
	// A species is a share of what the detector sees; as one more channel it would be counted twice.
	for (const channel of problem.runs[at].channels)
		if (request.species.some((s) => channel.id === speciesChannel(s.id))) channel.besideTotal = true;
	return { problem, model: probed(problem, at, times), at };
}

/** Constants of a run's own say nothing of another run, nor of this one at another temperature. */
function refuseLocal(request: FitRequest, run: RunContent, foreign: boolean): void {
	if (!request.options.local?.length) return;
	const own = foreign ? undefined : request.runs.find((r, i) => r === run || runId(r, i) === run.id);
	const kelvin = (of: RunContent) => toSi(of.temperature, 'temperature');
	if (own && Math.abs(kelvin(own) - kelvin(run)) < 1e-6) return;
	throw new RangeError(
		`This fit has parameters of its own in each run (${request.options.local.join(', ')}): they say nothing of another run or temperature. Predict with a fit whose constants are shared by all runs.`
	);
}

/** Whether a channel sees this species alone, in absolute terms. */
export const ownChannel = (channel: RunContent['channels'][number], species: string) => {
	const seen = Object.entries(channel.weights).filter(([, w]) => w !== 0);
	return seen.length === 1 && seen[0][0] === species && seen[0][1] === 1 && !channel.responseFactor;
};

/** The run with its unknown amounts filled in and a channel for every species. */
function probeRun(
	request: FitRequest,
	run: RunContent,
	known: (id: string) => boolean,
	foreign: boolean
): RunContent {
	const ids = request.runs.map(runId);
	const source = foreign ? -1 : request.runs.findIndex((r, i) => r === run || ids[i] === run.id);
	const name = source >= 0 ? ids[source] : null;
	let free = PROBE;
	while (ids.includes(free)) free += '-';
	const initial: RunContent['initial'] = Object.fromEntries(
		Object.entries(run.initial).map(([species, amount]): [string, Fittable] => {
			if (!isFitted(amount)) return [species, amount];
			if (name && known(`${name}.initial.${species}`)) return [species, amount];
			if (amount.guess) return [species, amount.guess];
			throw new RangeError(`The charge of ${species} in the run to predict is not known. Give its value.`);
		})
	);
	const unitOf = ({ id, molarMassGPerMol }: FitRequest['species'][number]): string => {
		const unit =
			run.channels.find((c) => ownChannel(c, id))?.unit ??
			Object.values(run.initial).map((a) => (isFitted(a) ? a.guess?.unit : a.unit))[0] ??
			'mol/L';
		// A mass concentration of a species without a molar mass cannot be given.
		const asMass = molarMassGPerMol === undefined && isUnitOf(unit, 'concentration', { molarMassGPerMol: 1 });
		return asMass && !isUnitOf(unit, 'concentration') ? 'mol/L' : unit;
	};
	return {
		...run,
		id: name ?? free,
		initial,
		...(name === null ? { timeOffset: statedOffset(run) } : {}),
		exclusions: [],
		replicates: undefined,
		channels: [
			...run.channels,
			...request.species.map((s) => ({
				id: speciesChannel(s.id),
				weights: { [s.id]: 1 },
				unit: unitOf(s)
			}))
		]
	};
}

/** A time offset that the fit did not estimate is known only where it was stated. */
function statedOffset({ timeOffset }: RunContent): RunContent['timeOffset'] {
	return timeOffset && isFitted(timeOffset) ? timeOffset.guess : timeOffset;
}

/** The request with the run to predict in the place of its own, or after the others; parameters stay the same. */
function compileProbe(request: FitRequest, probe: RunContent, times: number[]): KineticProblem {
	const filled: RunContent = {
		...probe,
		timepoints: times.map((time) => ({
			time,
			values: Object.fromEntries(probe.channels.map((c) => [c.id, 0]))
		}))
	};
	const runs = request.runs.map((r, i) => {
		const id = runId(r, i);
		return id === probe.id ? filled : { ...r, id };
	});
	if (!runs.includes(filled)) runs.push(filled);
	const weighting = { model: 'constant' as const };
	const options = { ...request.options, useTimeZeroRow: true, weighting };
	const { problem, issues } = compileProblem({ ...request, runs, options });
	if (!problem)
		throw new RangeError(
			issues
				.filter((i) => i.level === 'stop')
				.map((i) => i.message)
				.join(' ')
		);
	return problem;
}

/** A model of the probe's points alone, in the order of the times asked for. */
function probed(problem: KineticProblem, at: number, times: number[]): KineticModel {
	const run = problem.runs[at];
	const order = times.map((t) => run.timesS.indexOf(t * run.timeFactor));
	const points: Point[] = run.channels.flatMap((_, channel) =>
		order.map((time, index) => ({
			run: at,
			channel,
			index,
			time,
			kind: 'value' as const,
			observed: 0,
			sigma: 1
		}))
	);
	return new KineticModel(problem, points);
}

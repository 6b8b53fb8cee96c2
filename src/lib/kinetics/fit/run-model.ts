/**
 * One run of a fit compiled to arrays: conditions, charge, clock, channels and the points that count.
 *
 * Its rate constants are affine in the estimated parameters (`rate-forms.ts`), as are its charge, ln f of its channels and the
 * offset τ that is added to the recorded times.
 */
import type { FitFinding, FitRequest } from '../../schemas/fit';
import type { Network } from '../types';
import { toSi } from '../units';
import { constantLinear, linearOf, type Linear } from './affine';
import { readChannels, type ChannelModel } from './channels';
import { readPoints, type Point } from './points';
import { addDirections, type RateForm } from './rate-forms';
import { runId, type Slot } from './slots';
import type { Direction } from './spectral';

export interface RunModel {
	id: string;
	index: number;
	temperatureK: number;
	timeUnit: FitRequest['runs'][number]['timeUnit'];
	/** Seconds in one unit of recorded time. */
	timeFactor: number;
	/** Recorded times in s, ascending, each once. */
	timesS: Float64Array;
	directions: Direction[];
	/** Step and sense of each direction. */
	names: { step: string; sense: 'forward' | 'reverse' }[];
	/** ln k at the run's temperature. */
	lnRates: Linear[];
	/** The same at any temperature, for a run with a log. */
	rateForms: RateForm[];
	charge: Linear[];
	offset: Linear;
	channels: ChannelModel[];
	points: Point[];
	/** Measured temperature over time (recorded time in s, K), where there is a log. */
	log: { timesS: Float64Array; temperaturesK: Float64Array } | null;
}

export const TIME_FACTORS = { s: 1, min: 60, h: 3600, d: 86400 } as const;

/** @throws RangeError or UnitError in words for a run that cannot be read */
export function compileRun(
	request: FitRequest,
	network: Network,
	slots: Map<string, Slot>,
	free: Slot[],
	index: number,
	issues: FitFinding[]
): RunModel {
	const run = request.runs[index];
	const id = runId(run, index);
	const temperatureK = toSi(run.temperature, 'temperature');
	if (!(temperatureK > 0))
		throw new RangeError(
			`a temperature above 0 K is expected; found ${run.temperature.value} ${run.temperature.unit}.`
		);
	const timeFactor = TIME_FACTORS[run.timeUnit];
	const model: RunModel = {
		id,
		index,
		temperatureK,
		timeUnit: run.timeUnit,
		timeFactor,
		timesS: new Float64Array(0),
		directions: [],
		names: [],
		lnRates: [],
		rateForms: [],
		charge: network.species.map((s) =>
			Object.hasOwn(run.initial, s.id) ? linearOf(slots, free, `${id}.initial.${s.id}`) : constantLinear(0)
		),
		offset: run.timeOffset ? linearOf(slots, free, `${id}.timeOffset`) : constantLinear(0),
		channels: readChannels(request, network, slots, free, index, issues),
		points: [],
		log: readLog(run, timeFactor)
	};
	addDirections(model, network, slots, free, excessOf(run));
	readPoints(run, model, request.options.useTimeZeroRow, issues);
	return model;
}

function readLog(run: FitRequest['runs'][number], timeFactor: number): RunModel['log'] {
	if (!run.temperatureLog || run.temperatureLog.length < 2) return null;
	const rows = [...run.temperatureLog].sort((a, b) => a.time - b.time);
	return {
		timesS: Float64Array.from(rows, (r) => r.time * timeFactor),
		temperaturesK: Float64Array.from(rows, (r) => r.celsius + 273.15)
	};
}

function excessOf(run: FitRequest['runs'][number]): Record<string, number> {
	return Object.fromEntries(Object.entries(run.excess).map(([s, q]) => [s, toSi(q, 'concentration')]));
}

/**
 * Temperature × time: where every criterion holds at the estimates, how far inside, and in which share of the draws.
 *
 * For each draw and temperature the curve is stepped along the times with one exponential of the scheme (non-negative, no
 * cancelling; `propagator.ts`); each criterion is a weighted sum (`criteria.ts`). The same draws serve every temperature, so
 * that neighbouring points are comparable.
 *
 * | symbol | name here |
 * | --- | --- |
 * | g_j ≤ 0 | criterion j holds |
 * | −g_j/(size of its limit) | `margin` |
 */
import type {
	SetPointAnswer,
	WindowMapRequest,
	WindowMapResult,
	WindowRectangle
} from '../../schemas/window';
import { firstFormRequest } from '../../schemas/window';
import type { Criterion } from '../criteria';
import { linearSystem } from '../linear-system';
import { Propagator } from '../propagator';
import { rateConstants } from '../rate-laws';
import type { Conditions, Network } from '../types';
import { toSi } from '../units';
import { ENGINE_VERSION } from '../version';
import { jointDraws, jointFactor, valueAt, type Draws } from './draws';
import { copyNetwork, fittedNetwork, type FittedNetwork } from './parameters';
import { readQuestion } from './question';
import { largestRectangle } from './rectangle';
import type { FirstFormInput } from './types';
import { percent, SECONDS, withUnit } from './words';

export interface MapInput extends Omit<FirstFormInput, 'request'> {
	request: WindowMapRequest;
}

/** Called now and then with the share done; returning false ends the work with `MapCancelled`. */
export type MapProgress = (done: number) => boolean | void;

export class MapCancelled extends Error {
	constructor() {
		super('The map was cancelled.');
		this.name = 'MapCancelled';
	}
}

interface Plan {
	charge: Float64Array;
	excessMolPerL: Record<string, number>;
	criteria: readonly Criterion[];
	/** |size of the limit| of each criterion, by which its margin is divided. */
	sizes: Float64Array;
	temperaturesK: Float64Array;
	timesS: Float64Array;
}

/** @throws WindowRefusal for a request that cannot be computed, MapCancelled when `progress` says so. */
export function windowMap(input: MapInput, progress: MapProgress = () => true): WindowMapResult {
	const { request, fit } = input;
	const fitted = fittedNetwork({ ...input, request: asFirstForm(request) });
	const { plan, notes } = readPlan(input, fitted.network);
	const draws = drawsOf(fitted, input);
	const nominal = nominalMap(fitted.network, plan);
	const counted = draws ? countDraws(fitted, plan, draws, progress) : null;
	const probability = counted && Array.from(counted.holds, (count) => count / counted.used);
	const seconds = SECONDS[request.timeUnit];
	const temperaturesC = Array.from(plan.temperaturesK, (t) => t - 273.15);
	const times = Array.from(plan.timesS, (t) => t / seconds);
	const rectangle = probability && rectangleOf(probability, temperaturesC, times, request.probability);
	const studied = fit.studied?.temperatureC;
	return {
		kind: 'map',
		summary: rectangle
			? `Candidate window ${rectangle.temperatureC.map((t) => t.toFixed(1)).join(' to ')} °C, ${times.length > 0 ? rectangle.time.map((t) => Number(t.toPrecision(3))).join(' to ') : ''} ${request.timeUnit} at ${percent(request.probability)}`
			: `No candidate window at ${percent(request.probability)}`,
		temperaturesC,
		times,
		timeUnit: request.timeUnit,
		probability,
		...nominal,
		outsideStudied: temperaturesC.map((t) => !!studied && (t < studied[0] - 0.05 || t > studied[1] + 0.05)),
		rectangle,
		setPoint: request.setPoint ? assessSetPoint(input, fitted, plan, draws) : null,
		criteria: plan.criteria.map((c) => c.text),
		notes,
		draws: counted?.used ?? 0,
		drawsLeftOut: draws ? draws.count - (counted?.used ?? 0) : 0,
		seed: request.seed,
		engineVersion: ENGINE_VERSION
	};
}

const asFirstForm = (request: WindowMapRequest) =>
	firstFormRequest.parse({
		temperature: request.temperatures.from,
		charge: request.charge,
		excess: request.excess,
		criteria: request.criteria,
		responseFactors: request.responseFactors,
		allowOutsideStudied: true
	});

function readPlan(input: MapInput, network: Network): { plan: Plan; notes: WindowMapResult['notes'] } {
	const { request } = input;
	const { question, notes } = readQuestion({ ...input, request: asFirstForm(request) }, network);
	const even = (from: number, to: number, count: number) =>
		Float64Array.from({ length: count }, (_, i) => from + ((to - from) * i) / (count - 1));
	const { temperatures, times } = request;
	return {
		notes,
		plan: {
			charge: question.charge,
			excessMolPerL: question.conditions.excessMolPerL,
			criteria: question.criteria,
			sizes: sizesOf(question.criteria, question.charge),
			temperaturesK: even(
				toSi(temperatures.from, 'temperature'),
				toSi(temperatures.to, 'temperature'),
				temperatures.count
			),
			timesS: even(toSi(times.from, 'time'), toSi(times.to, 'time'), times.count)
		}
	};
}

/** The constant part of a limit, or what a ratio's weights make of the whole charge. */
function sizesOf(criteria: readonly Criterion[], charge: Float64Array): Float64Array {
	const total = charge.reduce((sum, c) => sum + c, 0);
	return Float64Array.from(criteria, ({ constant, weights }) => {
		if (constant !== 0) return Math.abs(constant);
		return total * Math.max(...Array.from(weights, Math.abs).filter((w) => w > 0 && w < 1), 1e-300);
	});
}

function drawsOf(fitted: FittedNetwork, { fit, request }: MapInput): Draws | null {
	if (fitted.varied.length === 0 || fitted.undetermined.length > 0) return null;
	const factor = jointFactor(fitted.varied, fit.covariance);
	return factor && jointDraws(factor, fit.degreesOfFreedom, request.draws, request.seed);
}

/** Curves of one network along the times of the plan, times-major, at one temperature. */
class Stepper {
	readonly curves: Float64Array;
	private readonly step: number;
	private readonly conditions: Conditions;

	constructor(private readonly plan: Plan) {
		const { timesS, charge } = plan;
		this.curves = new Float64Array(timesS.length * charge.length);
		this.step = timesS[1] - timesS[0];
		this.conditions = { temperatureK: 0, excessMolPerL: plan.excessMolPerL };
	}

	run(network: Network, temperatureK: number): Float64Array {
		const { timesS, charge } = this.plan;
		this.conditions.temperatureK = temperatureK;
		const propagator = new Propagator(linearSystem(network, rateConstants(network, this.conditions)));
		propagator.applyGrid({ firstS: timesS[0], stepS: this.step, count: timesS.length }, charge, this.curves);
		return this.curves;
	}
}

function nominalMap(network: Network, plan: Plan): Pick<WindowMapResult, 'holds' | 'margin' | 'binds'> {
	const { temperaturesK, timesS, criteria, charge, sizes } = plan;
	const stepper = new Stepper(plan);
	const margin: number[] = [];
	const binds: number[] = [];
	for (const temperatureK of temperaturesK) {
		const curves = stepper.run(network, temperatureK);
		for (let k = 0; k < timesS.length; k++) {
			let tightest = Infinity;
			let which = 0;
			criteria.forEach((criterion, j) => {
				const inside = -valueOf(criterion, curves, k * charge.length) / sizes[j];
				if (inside < tightest) [tightest, which] = [inside, j];
			});
			margin.push(tightest);
			binds.push(which);
		}
	}
	return { holds: margin.map((m) => m >= 0), margin, binds };
}

function valueOf({ weights, constant }: Criterion, curves: Float64Array, at: number): number {
	let sum = constant;
	for (let i = 0; i < weights.length; i++) sum += weights[i] * curves[at + i];
	return sum;
}

function countDraws(
	fitted: FittedNetwork,
	plan: Plan,
	draws: Draws,
	progress: MapProgress
): { holds: Uint32Array; used: number } {
	const { temperaturesK, timesS, criteria, charge } = plan;
	const holds = new Uint32Array(temperaturesK.length * timesS.length);
	const network = copyNetwork(fitted.network);
	const stepper = new Stepper(plan);
	const values = new Float64Array(draws.parameters);
	let used = 0;
	for (let d = 0; d < draws.count; d++) {
		if (d % 16 === 0 && progress(d / draws.count) === false) throw new MapCancelled();
		for (let j = 0; j < values.length; j++)
			values[j] = valueAt(fitted.varied[j], draws.deviations[d * draws.parameters + j]);
		if (!values.every(Number.isFinite)) continue;
		used++;
		fitted.apply(network, values);
		for (let i = 0; i < temperaturesK.length; i++) {
			const curves = stepper.run(network, temperaturesK[i]);
			for (let k = 0; k < timesS.length; k++) {
				let all = 1;
				for (let j = 0; j < criteria.length && all === 1; j++)
					if (valueOf(criteria[j], curves, k * charge.length) > 0) all = 0;
				holds[i * timesS.length + k] += all;
			}
		}
	}
	progress(1);
	return { holds, used };
}

function rectangleOf(
	probability: number[],
	temperaturesC: number[],
	times: number[],
	asked: number
): WindowRectangle | null {
	const good = probability.map((p) => p >= asked);
	const found = largestRectangle(good, temperaturesC, times);
	if (!found) return null;
	let lowest = 1;
	for (let i = found.rows[0]; i <= found.rows[1]; i++)
		for (let k = found.columns[0]; k <= found.columns[1]; k++)
			lowest = Math.min(lowest, probability[i * times.length + k]);
	return {
		temperatureC: [temperaturesC[found.rows[0]], temperaturesC[found.rows[1]]],
		time: [times[found.columns[0]], times[found.columns[1]]],
		lowestProbability: lowest
	};
}

const BOX_POINTS = 9;

/** The set-point box on a 9 × 9 grid of its own, corners included. */
function assessSetPoint(
	input: MapInput,
	fitted: FittedNetwork,
	plan: Plan,
	draws: Draws | null
): SetPointAnswer {
	const { request } = input;
	const { temperature, temperatureTolerance, time, timeTolerance } = request.setPoint!;
	const middleK = toSi(temperature, 'temperature');
	const middleS = toSi(time, 'time');
	const reachS = toSi({ value: timeTolerance, unit: time.unit }, 'time');
	const spread = (middle: number, reach: number) =>
		Float64Array.from({ length: BOX_POINTS }, (_, i) => middle + reach * ((2 * i) / (BOX_POINTS - 1) - 1));
	const box: Plan = {
		...plan,
		temperaturesK:
			temperatureTolerance > 0 ? spread(middleK, temperatureTolerance) : Float64Array.of(middleK),
		timesS: spread(middleS, Math.max(reachS, 1e-6 * middleS)).map((t) => Math.max(t, 0))
	};
	const nominal = nominalMap(fitted.network, box);
	const counted = draws && countDraws(fitted, box, draws, () => true);
	let worst = 0;
	const chance = (at: number) => (counted ? counted.holds[at] / counted.used : nominal.holds[at] ? 1 : 0);
	for (let at = 1; at < nominal.margin.length; at++)
		if (
			chance(at) < chance(worst) ||
			(chance(at) === chance(worst) && nominal.margin[at] < nominal.margin[worst])
		)
			worst = at;
	const robust = nominal.holds.every(Boolean) && chance(worst) >= request.probability;
	const seconds = SECONDS[request.timeUnit];
	const at = {
		temperatureC: box.temperaturesK[Math.floor(worst / box.timesS.length)] - 273.15,
		time: box.timesS[worst % box.timesS.length] / seconds,
		probability: chance(worst),
		binds: nominal.binds[worst]
	};
	const place = `${at.temperatureC.toFixed(1)} °C and ${withUnit(at.time, request.timeUnit)}`;
	const limit = plan.criteria[at.binds].text;
	return {
		robust,
		worst: at,
		sentence: robust
			? `Every point of the box meets every criterion in at least ${percent(at.probability)} of the draws; the weakest is ${place} (${limit}).`
			: `Not robust: at ${place} ${limit} ${nominal.holds[worst] ? 'holds' : 'is not met at the estimates, and every criterion holds'} in ${percent(at.probability)} of the draws, ${percent(request.probability)} are asked for.`
	};
}

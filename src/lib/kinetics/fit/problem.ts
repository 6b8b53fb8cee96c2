/**
 * A fit request compiled to arrays: runs, channels, points and the linear maps from the estimated parameters.
 *
 * On the scale of estimation everything that the curves need is linear in the parameters x:
 *     ln k_d = b_d + Σ_j A_dj x_j        (Arrhenius and Eyring terms, excess concentrations, K = k_f/k_r, ties)
 *     c₀ᵢ = b_i + Σ_j A_ij x_j,   ln f = b + Σ_j A_j x_j,   τ = b + Σ_j A_j x_j
 * so that derivatives follow from those of the curves with respect to ln k, c₀ and t by one sparse product.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | b, A | `Linear.constant`, `Linear.terms` |
 * | f (response factor) | `ChannelModel.lnResponse` |
 * | τ (time offset, added to the recorded times) | `RunModel.offset` |
 */
import type { FitFinding, FitRequest } from '../../schemas/fit';
import { isFitted } from '../../schemas/quantity';
import { GAS_CONSTANT, inverseTemperatureGap } from '../rate-laws';
import { toNetwork } from '../from-scheme';
import type { Network, RateLaw } from '../types';
import { toSi, UnitError } from '../units';
import { constantLinear, linearOf, scaleLinear, sumLinear, type Linear } from './affine';
import { readChannels, type ChannelModel } from './channels';
import { readPoints, type Point } from './points';
import { readSlots, runId, type Slot } from './slots';
import type { Direction } from './spectral';
import { assignSigmas } from './weights';

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

/** ln k(T) = base − energy·(1/T − 1/T_ref)/R [+ ln(T/T_ref) in Eyring's form]. */
export interface RateForm {
	base: Linear;
	energy: Linear;
	eyring: boolean;
}

export interface KineticProblem {
	request: FitRequest;
	network: Network;
	species: string[];
	slots: Map<string, Slot>;
	/** The estimated parameters, in order. */
	free: Slot[];
	runs: RunModel[];
	/** All points that count, runs in order; row i of the residual vector is points[i]. */
	points: Point[];
	/** Points with a value (not censored). */
	counted: number;
	censored: number;
}

export interface Compilation {
	problem: KineticProblem | null;
	slots: Map<string, Slot>;
	issues: FitFinding[];
}

export const TIME_FACTORS = { s: 1, min: 60, h: 3600, d: 86400 } as const;

/**
 * Compiles a request. `problem` is null while an issue of level 'stop' stands.
 * Never throws for anything that the request's author can mend.
 */
export function compileProblem(request: FitRequest): Compilation {
	const { slots, issues } = readSlots(request);
	const { network, issues: networkIssues } = toNetwork({
		species: request.species,
		steps: request.steps,
		referenceTemperature: request.referenceTemperature
	});
	for (const issue of networkIssues)
		issues.push({ code: issue.code, level: issue.level, message: issue.message });
	checkSpecies(network, request, issues);
	if (issues.some((i) => i.level === 'stop')) return { problem: null, slots, issues };
	const free = [...slots.values()].filter((s) => s.state === 'fitted');
	const runs: RunModel[] = [];
	request.runs.forEach((run, index) => {
		try {
			runs.push(compileRun(request, network, slots, free, index, issues));
		} catch (error) {
			if (!(error instanceof UnitError || error instanceof RangeError)) throw error;
			const id = runId(run, index);
			issues.push({ code: 'run-invalid', level: 'stop', message: `Run ${id}: ${error.message}`, runs: [id] });
		}
	});
	if (new Set(runs.map((r) => r.id)).size !== runs.length)
		issues.push({
			code: 'run-duplicate',
			level: 'stop',
			message: 'Two runs carry the same id. Give each its own.'
		});
	assignSigmas(request, runs, issues);
	const points = runs.flatMap((r) => r.points);
	const counted = points.filter((p) => p.kind === 'value').length;
	const problem: KineticProblem = {
		request,
		network,
		species: network.species.map((s) => s.id),
		slots,
		free,
		runs,
		points,
		counted,
		censored: points.length - counted
	};
	return { problem: issues.some((i) => i.level === 'stop') ? null : problem, slots, issues };
}

function checkSpecies(network: Network, request: FitRequest, issues: FitFinding[]): void {
	const known = new Set(network.species.map((s) => s.id));
	const unknown = (id: string, where: string) =>
		issues.push({
			code: 'species-unknown',
			level: 'stop',
			message: `${where} names the species "${id}", which the scheme does not have. The scheme has ${[...known].join(', ')}.`
		});
	for (const step of network.steps) {
		if (!known.has(step.reactant)) unknown(step.reactant, `Step ${step.id}`);
		for (const p of step.products) if (!known.has(p.species)) unknown(p.species, `Step ${step.id}`);
	}
	request.runs.forEach((run, index) => {
		const id = runId(run, index);
		for (const [species, amount] of Object.entries(run.initial)) {
			if (!known.has(species)) unknown(species, `The charge of run ${id}`);
			if (!isFitted(amount) && amount.value < 0)
				issues.push({
					code: 'charge-invalid',
					level: 'stop',
					message: `Run ${id}: the charge of ${species} must not be below zero; found ${amount.value} ${amount.unit}.`,
					runs: [id]
				});
		}
		for (const channel of run.channels)
			for (const species of Object.keys(channel.weights))
				if (!known.has(species)) unknown(species, `Channel ${channel.id} of run ${id}`);
	});
	if (network.steps.length === 0)
		issues.push({
			code: 'no-steps',
			level: 'stop',
			message: 'The scheme has no finished step, so there is nothing to fit.'
		});
}

function compileRun(
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

function addDirections(
	model: RunModel,
	network: Network,
	slots: Map<string, Slot>,
	free: Slot[],
	excess: Record<string, number>
): void {
	const index = new Map(network.species.map((s, i) => [s.id, i]));
	const push = (
		step: string,
		sense: 'forward' | 'reverse',
		from: string,
		products: Direction['products'],
		form: RateForm
	) => {
		if (form.base.constant === -Infinity) return;
		model.directions.push({ from: index.get(from)!, products });
		model.names.push({ step, sense });
		model.rateForms.push(form);
		model.lnRates.push(lnRateAt(form, model.temperatureK, network.referenceTemperatureK));
	};
	for (const step of network.steps) {
		const law = (name: string, of: RateLaw) => rateForm(name, of, slots, free, excess);
		const forward = law(`${step.id}.forward`, step.forward);
		const products = step.products.map((p) => ({ to: index.get(p.species)!, coefficient: p.coefficient }));
		push(step.id, 'forward', step.reactant, products, forward);
		if (!step.reverse) continue;
		if (step.products.length !== 1 || step.products[0].coefficient !== 1)
			throw new RangeError(`step ${step.id} is reversible but not one to one; split it into two steps.`);
		const reverse =
			step.reverse.form === 'equilibrium'
				? throughEquilibrium(forward, step.id, slots, free)
				: law(`${step.id}.reverse`, step.reverse);
		const back = [{ to: index.get(step.reactant)!, coefficient: 1 }];
		push(step.id, 'reverse', step.products[0].species, back, reverse);
	}
}

/** ln k of a direction at a temperature. */
export function lnRateAt(form: RateForm, temperatureK: number, referenceK: number): Linear {
	const gap = inverseTemperatureGap(temperatureK, referenceK);
	return sumLinear(
		form.base,
		scaleLinear(form.energy, -gap / GAS_CONSTANT),
		constantLinear(form.eyring ? Math.log(temperatureK / referenceK) : 0)
	);
}

function rateForm(
	name: string,
	law: RateLaw,
	slots: Map<string, Slot>,
	free: Slot[],
	excess: Record<string, number>
): RateForm {
	const parts = [linearOf(slots, free, `${name}.kRef`)];
	for (const { species, order } of law.excess) {
		const concentration = excess[species];
		if (concentration === undefined || concentration < 0)
			throw new RangeError(
				`the concentration of ${species}, held in excess by ${name}, is missing. Give it under "excess".`
			);
		parts.push(constantLinear(order === 0 ? 0 : order * Math.log(concentration)));
	}
	const energy = `${name}.activationEnergy`;
	return {
		base: sumLinear(...parts),
		energy: slots.has(energy) ? linearOf(slots, free, energy) : constantLinear(0),
		eyring: law.form === 'eyring'
	};
}

/** k_reverse = k_forward/K: ln K and ΔH° are taken off. */
function throughEquilibrium(
	forward: RateForm,
	step: string,
	slots: Map<string, Slot>,
	free: Slot[]
): RateForm {
	const constant = linearOf(slots, free, `${step}.reverse.equilibriumConstant`);
	const enthalpy = `${step}.reverse.enthalpy`;
	return {
		base: sumLinear(forward.base, scaleLinear(constant, -1)),
		energy: slots.has(enthalpy)
			? sumLinear(forward.energy, scaleLinear(linearOf(slots, free, enthalpy), -1))
			: forward.energy,
		eyring: forward.eyring
	};
}

/**
 * What the workbook recalculates, taken from a stored fit: every parameter as a cell, the rate constants of each run,
 * the times at which something was measured, and the points with what the engine predicted for them.
 */
import { isFitted } from '$lib/schemas/quantity';
import type { FitReport, FitRequest } from '$lib/schemas/fit';
import { isEquilibrium } from '$lib/schemas/scheme';
import { GAS_CONSTANT } from '$lib/kinetics/rate-laws';
import { linearSystem, solve, type LinearSystem, type Mode } from '$lib/kinetics';
import { compileProblem, type KineticProblem, type RunModel } from '$lib/kinetics/fit/problem';
import { reportedFactor, toReported, type Slot } from '$lib/kinetics/fit/slots';
import { toSi } from '$lib/kinetics/units';
import { AppError } from '../errors';
import { buildLadder, climb, type Climb, type Ladder, type Matrix } from './ladder';

export interface PlanParameter {
	id: string;
	unit: string;
	state: string;
	value: number;
	standardError: number | null;
	ci95: [number, number] | null;
	/** Engine's unit per reported unit. */
	factor: number;
	si: number;
	tie: { to: string; factor: number } | null;
}

export interface PlanDirection {
	step: string;
	sense: 'forward' | 'reverse';
	label: string;
	from: number;
	products: { to: number; coefficient: number }[];
	constantId: string;
	/** Reverse through an equilibrium constant: the position of the forward direction. */
	throughEquilibrium: number | null;
	energyId: string | null;
	eyring: boolean;
	excess: { species: string; molPerL: number; order: number }[];
	/** 1/(time unit of the run). */
	constant: number;
}

export interface PlanRun {
	id: string;
	label: string;
	timeUnit: string;
	secondsPerUnit: number;
	temperatureK: number;
	directions: PlanDirection[];
	matrix: Matrix;
	charge: { parameterId: string | null; value: number }[];
	offset: { parameterId: string | null; value: number };
	times: number[];
	climbs: Climb[];
	ladder: Ladder;
	modes: Mode[];
	method: string;
	errorEstimate: number;
	/** A run with a logged temperature has no constant K: its predictions stand as stored. */
	logged: boolean;
}

export interface PlanPoint {
	run: number;
	channel: number;
	/** Position among the run's times. */
	time: number;
	recordedTime: number;
	row: number;
	kind: 'value' | 'below' | 'above';
	observed: number;
	sigma: number;
	predicted: number;
}

export interface RecalculationPlan {
	request: FitRequest;
	report: FitReport;
	species: string[];
	referenceK: number;
	gasConstant: number;
	parameters: PlanParameter[];
	runs: PlanRun[];
	points: PlanPoint[];
	channels: RunModel['channels'][];
}

function parametersOf(problem: KineticProblem, report: FitReport): PlanParameter[] {
	const reported = new Map(report.parameters.map((p) => [p.id, p]));
	return [...problem.slots.values()].map((slot: Slot) => {
		const found = reported.get(slot.id);
		const value = found?.estimate ?? toReported(slot, slot.value);
		const factor = 1 / reportedFactor(slot);
		return {
			id: slot.id,
			unit: found?.unit ?? slot.unit,
			state: found?.state ?? slot.state,
			value,
			standardError: found?.standardError ?? null,
			ci95: found?.ci95 ?? null,
			factor,
			si: value * factor,
			tie: slot.tie
		};
	});
}

function directionsOf(
	request: FitRequest,
	run: FitRequest['runs'][number],
	si: Map<string, number>,
	temperatureK: number,
	referenceK: number,
	seconds: number
): PlanDirection[] {
	const index = new Map(request.species.map((s, i) => [s.id, i]));
	const gap = 1 / temperatureK - 1 / referenceK;
	const found: PlanDirection[] = [];
	const excessOf = (law: { excess?: { species: string; order: number }[] }) =>
		(law.excess ?? []).map((e) => ({
			...e,
			molPerL: run.excess[e.species] ? toSi(run.excess[e.species], 'concentration') : NaN
		}));
	const lawConstant = (d: Omit<PlanDirection, 'constant'>): number => {
		const energy = d.energyId === null ? 0 : (si.get(d.energyId) ?? 0);
		let k = (si.get(d.constantId) ?? NaN) * Math.exp((-energy / GAS_CONSTANT) * gap);
		if (d.eyring) k *= temperatureK / referenceK;
		for (const e of d.excess) k *= e.molPerL ** e.order;
		return k * seconds;
	};
	for (const step of request.steps) {
		if (step.reactant === '') continue;
		const from = index.get(step.reactant)!;
		const products = step.products.map((p) => ({ to: index.get(p.species)!, coefficient: p.coefficient }));
		const names = step.products.map((p) =>
			p.coefficient === 1 ? p.species : `${p.coefficient} ${p.species}`
		);
		const energyId = (sense: string, law: object) =>
			'activationEnergy' in law && law.activationEnergy ? `${step.id}.${sense}.activationEnergy` : null;
		const forward = {
			step: step.id,
			sense: 'forward' as const,
			label: `${step.reactant} → ${names.join(' + ') || 'loss'}`,
			from,
			products,
			constantId: `${step.id}.forward.kRef`,
			throughEquilibrium: null,
			energyId: energyId('forward', step.forward),
			eyring: step.forward.form === 'eyring',
			excess: excessOf(step.forward)
		};
		found.push({ ...forward, constant: lawConstant(forward) });
		const { reverse } = step;
		if (!reverse || products.length !== 1) continue;
		const back = {
			step: step.id,
			sense: 'reverse' as const,
			label: `${names[0]} → ${step.reactant}`,
			from: products[0].to,
			products: [{ to: from, coefficient: 1 }]
		};
		if (isEquilibrium(reverse)) {
			const at = found.length - 1;
			const enthalpyId = reverse.enthalpy ? `${step.id}.reverse.enthalpy` : null;
			const enthalpy = enthalpyId ? (si.get(enthalpyId) ?? 0) : 0;
			const constantId = `${step.id}.reverse.equilibriumConstant`;
			const equilibrium = (si.get(constantId) ?? NaN) * Math.exp((-enthalpy / GAS_CONSTANT) * gap);
			found.push({
				...back,
				constantId,
				throughEquilibrium: at,
				energyId: enthalpyId,
				eyring: false,
				excess: [],
				constant: found[at].constant / equilibrium
			});
			continue;
		}
		const own = {
			...back,
			constantId: `${step.id}.reverse.kRef`,
			throughEquilibrium: null,
			energyId: energyId('reverse', reverse),
			eyring: reverse.form === 'eyring',
			excess: excessOf(reverse)
		};
		found.push({ ...own, constant: lawConstant(own) });
	}
	return found;
}

export function matrixOf(n: number, directions: PlanDirection[]): Matrix {
	const matrix: Matrix = Array.from({ length: n }, () => new Array<number>(n).fill(0));
	for (const d of directions) {
		matrix[d.from][d.from] -= d.constant;
		for (const { to, coefficient } of d.products) matrix[to][d.from] += coefficient * d.constant;
	}
	return matrix;
}

/** The same flows for the engine, in 1/s, so that its modes are those of the signed constants. */
function systemOf(request: FitRequest, directions: PlanDirection[], seconds: number): LinearSystem {
	const steps = directions.map((d, i) => ({
		id: `${d.step}.${i}`,
		reactant: request.species[d.from].id,
		products: d.products.map((p) => ({ species: request.species[p.to].id, coefficient: p.coefficient })),
		forward: { form: 'arrhenius' as const, kRefPerS: 1, energyJPerMol: 0, excess: [] },
		reverse: null
	}));
	return linearSystem(
		{
			species: request.species.map((s) => ({ id: s.id, name: s.name })),
			steps,
			referenceTemperatureK: 298.15
		},
		{
			forward: Float64Array.from(directions, (d) => d.constant / seconds),
			reverse: new Float64Array(directions.length)
		}
	);
}

function chargeOf(model: RunModel, request: FitRequest, si: Map<string, number>): PlanRun['charge'] {
	const run = request.runs[model.index];
	return request.species.map((s) => {
		if (!Object.hasOwn(run.initial, s.id)) return { parameterId: null, value: 0 };
		const parameterId = `${model.id}.initial.${s.id}`;
		return { parameterId, value: si.get(parameterId) ?? 0 };
	});
}

function planRun(
	problem: KineticProblem,
	model: RunModel,
	si: Map<string, number>,
	referenceK: number,
	label: string
): PlanRun {
	const { request } = problem;
	const run = request.runs[model.index];
	const seconds = model.timeFactor;
	const directions = directionsOf(request, run, si, model.temperatureK, referenceK, seconds);
	const matrix = matrixOf(request.species.length, directions);
	const charge = chargeOf(model, request, si);
	const offsetId = run.timeOffset ? `${model.id}.timeOffset` : null;
	const offset = { parameterId: offsetId, value: (offsetId ? (si.get(offsetId) ?? 0) : 0) / seconds };
	const times = Array.from(model.timesS, (t) => t / seconds);
	const shifted = times.map((t) => Math.max(0, t + offset.value));
	const ladder = buildLadder(matrix, Math.max(0, ...shifted));
	const start = charge.map((c) => c.value);
	const solution = solve(systemOf(request, directions, seconds), Float64Array.from(start));
	return {
		id: model.id,
		label,
		timeUnit: model.timeUnit,
		secondsPerUnit: seconds,
		temperatureK: model.temperatureK,
		directions,
		matrix,
		charge,
		offset,
		times,
		climbs: shifted.map((t) => climb(ladder, start, t)),
		ladder,
		modes: solution.modes,
		method: solution.method,
		errorEstimate: solution.errorEstimate,
		logged: model.log !== null
	};
}

function pointsOf(problem: KineticProblem, report: FitReport): PlanPoint[] {
	const stored = new Map(report.residuals.map((r) => [`${r.run}|${r.channel}|${r.index}`, r]));
	return problem.points.map((point) => {
		const model = problem.runs[point.run];
		const channel = model.channels[point.channel].id;
		const found = stored.get(`${model.id}|${channel}|${point.index}`);
		if (!found)
			throw new AppError('internal', 'The stored fit does not hold a residual for every point.', {
				detail: `${model.id} ${channel} ${point.index}`
			});
		return {
			run: point.run,
			channel: point.channel,
			time: point.time,
			recordedTime: model.timesS[point.time] / model.timeFactor,
			row: point.index,
			kind: point.kind,
			observed: point.observed,
			sigma: found.sigma,
			predicted: found.predicted
		};
	});
}

/** Reads a stored fit into what the workbook writes. `labels` name the runs as the study does. */
export function planRecalculation(
	request: FitRequest,
	report: FitReport,
	labels: string[] = []
): RecalculationPlan {
	const { problem, issues } = compileProblem(request);
	if (!problem)
		throw new AppError('wrong-state', 'The stored fit cannot be read by this version of the service.', {
			detail: issues.map((i) => i.message).join(' ')
		});
	const parameters = parametersOf(problem, report);
	const si = new Map(parameters.map((p) => [p.id, p.si]));
	const referenceK = toSi(request.referenceTemperature, 'temperature');
	return {
		request,
		report,
		species: request.species.map((s) => s.id),
		referenceK,
		gasConstant: GAS_CONSTANT,
		parameters,
		runs: problem.runs.map((model, i) =>
			planRun(problem, model, si, referenceK, labels[i] ?? `Run ${model.id}`)
		),
		points: pointsOf(problem, report),
		channels: problem.runs.map((r) => r.channels)
	};
}

/** For the sheet of assumptions: whether anything in the request was fitted besides the constants. */
export const fittedCharges = (request: FitRequest): boolean =>
	request.runs.some((r) => Object.values(r.initial).some((v) => isFitted(v)));

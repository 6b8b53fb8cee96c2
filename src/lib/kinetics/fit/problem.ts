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
import { toNetwork } from '../from-scheme';
import type { Network } from '../types';
import { UnitError } from '../units';
import type { Point } from './points';
import { readSlots } from './read-slots';
import { compileRun, type RunModel } from './run-model';
import { runId, type Slot } from './slots';
import { assignSigmas } from './weights';

export type { RunModel };

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

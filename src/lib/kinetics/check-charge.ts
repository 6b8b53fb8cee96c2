/**
 * Checks that depend on what is charged and under which conditions: amounts, missing concentrations in excess, species that
 * nothing reaches, and an excess so small that pseudo-first-order is doubtful.
 *
 *     equivalents = [X] / Σ charge of what leads to the step's reactant;  doubtful below 10: the constant is then some 4 % low
 *
 * | symbol | name here |
 * | --- | --- |
 * | [X] | `Conditions.excessMolPerL` |
 * | 10 | `limit` (`CheckOptions.excessEquivalents`) |
 *
 * Source: common practice for pseudo-first-order runs; how far off it is in a given case: `adequacy.ts`.
 */
import { excessOf, stop } from './check-issue';
import type { Conditions, Network, NetworkIssue } from './types';

/** mol/L of each species id at the start. */
export type ChargeById = Readonly<Record<string, number>>;

export function chargeIssues(network: Network, charge: ChargeById): NetworkIssue[] {
	return Object.entries(charge).flatMap(([id, value]) => {
		if (!network.species.some((species) => species.id === id))
			return [
				stop('species-unknown', `The charge names ${id}, which is not in the scheme.`, { speciesId: id })
			];
		if (value >= 0 && Number.isFinite(value)) return [];
		return [
			stop('charge-invalid', `The charge of ${id} must be a number ≥ 0; found ${value} mol/L.`, {
				speciesId: id
			})
		];
	});
}

export function excessMissing(network: Network, conditions: Conditions): NetworkIssue[] {
	const issues: NetworkIssue[] = [];
	for (const step of network.steps)
		for (const { species } of excessOf(step)) {
			const value = conditions.excessMolPerL[species];
			if (value !== undefined && value >= 0 && Number.isFinite(value)) continue;
			const message = `Step ${step.id} depends on ${species}, held in excess; give its concentration for this run.`;
			issues.push(stop('excess-missing', message, { stepId: step.id, speciesId: species }));
		}
	return issues;
}

/** Species that nothing leads to from the charge: their curves stay at zero. */
export function unreached(network: Network, charge: ChargeById): NetworkIssue[] {
	const reached = reachedFrom(
		network,
		network.species.filter((s) => (charge[s.id] ?? 0) > 0).map((s) => s.id)
	);
	const inSteps = new Set(
		network.steps.flatMap((step) => [step.reactant, ...step.products.map((p) => p.species)])
	);
	return network.species
		.filter(({ id }) => inSteps.has(id) && !reached.has(id))
		.map(({ id }) => ({
			level: 'caution',
			code: 'species-unreached',
			message: `Nothing that is charged leads to ${id}; it stays at zero.`,
			speciesId: id
		}));
}

function reachedFrom(network: Network, start: string[]): Set<string> {
	const reached = new Set(start);
	for (let grew = true; grew;) {
		const before = reached.size;
		for (const step of network.steps) {
			if (reached.has(step.reactant)) step.products.forEach((p) => reached.add(p.species));
			if (step.reverse && step.products.some((p) => reached.has(p.species))) reached.add(step.reactant);
		}
		grew = reached.size > before;
	}
	return reached;
}

/** Excess over all that is charged upstream of the step, in equivalents. */
export function smallExcess(
	network: Network,
	charge: ChargeById,
	conditions: Conditions,
	limit: number
): NetworkIssue[] {
	const issues: NetworkIssue[] = [];
	for (const step of network.steps) {
		const limiting = network.species
			.filter(({ id, role }) => role !== 'reagent in excess' && (charge[id] ?? 0) > 0)
			.filter(({ id }) => reachedFrom(network, [id]).has(step.reactant))
			.reduce((sum, { id }) => sum + charge[id], 0);
		for (const { species, order } of step.forward.excess) {
			const equivalents = conditions.excessMolPerL[species] / limiting;
			if (order === 0 || !(limiting > 0) || equivalents >= limit) continue;
			const message = `${species} is at ${equivalents.toPrecision(2)} equivalents in step ${step.id}; below ${limit} it is used up noticeably and pseudo-first-order is doubtful.`;
			issues.push({
				level: 'caution',
				code: 'excess-too-small',
				message,
				stepId: step.id,
				speciesId: species
			});
		}
	}
	return issues;
}

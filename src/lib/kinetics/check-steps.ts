/**
 * Checks of the scheme itself, whatever is charged: species and steps that name each other, coefficients, constants, duplicates.
 *
 * A reverse direction is first order only where the step is one to one: v = k_r Π c_product, so A ⇌ B + C is refused.
 *
 * | symbol | name here |
 * | --- | --- |
 * | k_ref, Ea or ΔH‡ | `RateLaw.kRefPerS`, `RateLaw.energyJPerMol` |
 * | K_ref, ΔH° | `EquilibriumLaw.kEqRef`, `EquilibriumLaw.enthalpyJPerMol` |
 *
 * Source: definition of a first-order network (`types.ts`); J. Wei and C. D. Prater, Adv. Catal. 13 (1962) 203.
 */
import { excessOf, stop } from './check-issue';
import type { EquilibriumLaw, Network, NetworkIssue, RateLaw, Step } from './types';

export function speciesIssues(network: Network): NetworkIssue[] {
	const issues: NetworkIssue[] = [];
	const seen = new Set<string>();
	const used = new Set<string>();
	for (const step of network.steps) {
		[step.reactant, ...step.products.map((p) => p.species)].forEach((id) => used.add(id));
		for (const { species } of excessOf(step)) used.add(species);
	}
	for (const { id } of network.species) {
		if (seen.has(id))
			issues.push(
				stop('species-duplicate', `Species ${id} is listed twice. Remove or rename one.`, { speciesId: id })
			);
		seen.add(id);
		if (!used.has(id))
			issues.push({
				level: 'note',
				code: 'species-in-no-step',
				message: `${id} takes part in no step.`,
				speciesId: id
			});
	}
	return issues;
}

export function stepIssues(network: Network, step: Step): NetworkIssue[] {
	const where = { stepId: step.id };
	const issues: NetworkIssue[] = [];
	if (step.reactant === '') issues.push(stop('step-dangling', `Step ${step.id} has no reactant.`, where));
	const named = [
		step.reactant,
		...step.products.map((p) => p.species),
		...excessOf(step).map((e) => e.species)
	];
	for (const id of new Set(named))
		if (id !== '' && !network.species.some((species) => species.id === id))
			issues.push(
				stop(
					'species-unknown',
					`Step ${step.id} names ${id}, which is not in the scheme. Add the species or change the step.`,
					{
						...where,
						speciesId: id
					}
				)
			);
	for (const product of step.products) {
		if (product.species === step.reactant)
			issues.push(
				stop(
					'step-to-itself',
					`Step ${step.id} turns ${step.reactant} into itself. Choose another product.`,
					where
				)
			);
		if (!(product.coefficient > 0) || !Number.isFinite(product.coefficient))
			issues.push(
				stop(
					'coefficient-invalid',
					`Step ${step.id}: the coefficient of ${product.species} must be above 0; found ${product.coefficient}.`,
					where
				)
			);
	}
	issues.push(...lawIssues(step));
	return issues;
}

function lawIssues(step: Step): NetworkIssue[] {
	const where = { stepId: step.id };
	const issues = constantIssues(step, step.forward, 'forward');
	if (!step.reverse) return issues;
	if (step.products.length !== 1 || step.products[0].coefficient !== 1)
		issues.push(
			stop(
				'reversible-not-one-to-one',
				`Step ${step.id} is reversible but not one to one: its reverse would not be first order. Make it irreversible, or split it.`,
				where
			)
		);
	issues.push(
		...(step.reverse.form === 'equilibrium'
			? equilibriumIssues(step, step.reverse)
			: constantIssues(step, step.reverse, 'reverse'))
	);
	return issues;
}

function constantIssues(step: Step, law: RateLaw, direction: string): NetworkIssue[] {
	const bad =
		!(law.kRefPerS >= 0) || !Number.isFinite(law.kRefPerS)
			? `the ${direction} constant must be a number ≥ 0; found ${law.kRefPerS} 1/s`
			: !Number.isFinite(law.energyJPerMol)
				? `the ${direction} activation energy must be a finite number; found ${law.energyJPerMol} J/mol`
				: '';
	return bad ? [stop('constant-invalid', `Step ${step.id}: ${bad}.`, { stepId: step.id })] : [];
}

function equilibriumIssues(step: Step, law: EquilibriumLaw): NetworkIssue[] {
	const fine = law.kEqRef > 0 && Number.isFinite(law.kEqRef) && Number.isFinite(law.enthalpyJPerMol);
	const message = `Step ${step.id}: the equilibrium constant must be above 0 and its enthalpy finite; found ${law.kEqRef} and ${law.enthalpyJPerMol} J/mol.`;
	return fine ? [] : [stop('constant-invalid', message, { stepId: step.id })];
}

export function duplicateSteps(network: Network): NetworkIssue[] {
	const seen = new Map<string, string>();
	const ids = new Set<string>();
	return network.steps.flatMap((step) => {
		// Constants are named by the id of their step: two of one id would silently share them.
		if (ids.has(step.id))
			return [
				stop('step-duplicate', `Two steps have the id ${step.id}. Give each its own.`, { stepId: step.id })
			];
		ids.add(step.id);
		const key = `${step.reactant}>${step.products
			.map((p) => `${p.coefficient} ${p.species}`)
			.sort()
			.join('+')}`;
		const first = seen.get(key);
		seen.set(key, first ?? step.id);
		const message = `Steps ${first} and ${step.id} are the same step twice; their constants add.`;
		return first
			? [{ level: 'caution' as const, code: 'step-duplicate' as const, message, stepId: step.id }]
			: [];
	});
}

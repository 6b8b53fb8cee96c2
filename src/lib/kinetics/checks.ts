/**
 * What is wrong or doubtful in a network, before anything is computed.
 *
 * Each finding is a typed issue with the species or step it concerns. `stop`: nothing can be computed; `caution`: computed,
 * but the chemist should look; `note`: for information.
 */
import { blockWeights } from './block-weights';
import { components } from './components';
import { cycleIssues } from './cycles';
import { linearSystem } from './linear-system';
import type { Conditions, EquilibriumLaw, Network, NetworkIssue, RateLaw, Step } from './types';

/** mol/L of each species id at the start. */
export type ChargeById = Readonly<Record<string, number>>;

/** Relative mass that a step may lose or gain before it is reported: rounding of molar masses. */
const MASS_TOLERANCE = 1e-3;
/** Pseudo-first-order is doubtful below this many equivalents; common practice, hence overridable. */
const EXCESS_EQUIVALENTS = 10;

export interface CheckOptions {
	/** Equivalents below which an excess is reported; 10 when left out. */
	excessEquivalents?: number;
}

/**
 * Checks a network, and with a charge and conditions also what depends on them.
 * @returns issues, those of level `stop` first; empty when there is nothing to say
 */
export function checkNetwork(
	network: Network,
	charge?: ChargeById,
	conditions?: Conditions,
	options: CheckOptions = {}
): NetworkIssue[] {
	const issues = [...speciesIssues(network), ...network.steps.flatMap((step) => stepIssues(network, step))];
	issues.push(...duplicateSteps(network));
	if (charge) issues.push(...chargeIssues(network, charge));
	if (conditions) issues.push(...excessMissing(network, conditions));
	if (issues.some((issue) => issue.level === 'stop')) return sorted(issues);
	issues.push(...growthIssues(network));
	issues.push(...network.steps.flatMap((step) => massIssues(network, step)));
	issues.push(...cycleIssues(network, conditions));
	if (charge) {
		issues.push(...unreached(network, charge));
		if (conditions)
			issues.push(
				...smallExcess(network, charge, conditions, options.excessEquivalents ?? EXCESS_EQUIVALENTS)
			);
	}
	return sorted(issues);
}

const RANK = { stop: 0, caution: 1, note: 2 } as const;
const sorted = (issues: NetworkIssue[]) => issues.sort((a, b) => RANK[a.level] - RANK[b.level]);

function speciesIssues(network: Network): NetworkIssue[] {
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

function stop(code: NetworkIssue['code'], message: string, where: Partial<NetworkIssue>): NetworkIssue {
	return { level: 'stop', code, message, ...where };
}

function stepIssues(network: Network, step: Step): NetworkIssue[] {
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

function excessOf(step: Step): RateLaw['excess'] {
	return step.reverse && step.reverse.form !== 'equilibrium'
		? [...step.forward.excess, ...step.reverse.excess]
		: step.forward.excess;
}

function duplicateSteps(network: Network): NetworkIssue[] {
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

function chargeIssues(network: Network, charge: ChargeById): NetworkIssue[] {
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

function excessMissing(network: Network, conditions: Conditions): NetworkIssue[] {
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

/** Loops whose products multiply have no bounded solution. Constants are set to 1: only the coefficients matter. */
function growthIssues(network: Network): NetworkIssue[] {
	const ones = Float64Array.from(network.steps, () => 1);
	const reverse = Float64Array.from(network.steps, (step) => (step.reverse ? 1 : 0));
	const system = linearSystem(network, { forward: ones, reverse });
	try {
		blockWeights(system, components(system));
		return [];
	} catch (error) {
		return [stop('coefficient-invalid', (error as Error).message, {})];
	}
}

function massIssues(network: Network, step: Step): NetworkIssue[] {
	const mass = (id: string) => network.species.find((species) => species.id === id)?.molarMassGPerMol;
	const before = mass(step.reactant);
	if (before === undefined || step.products.length === 0) return [];
	let after = 0;
	for (const product of step.products) {
		const own = mass(product.species);
		if (own === undefined) return [];
		after += own * product.coefficient;
	}
	const gap = after - before;
	const carried = step.forward.excess.some(
		({ species }) => Math.abs((mass(species) ?? NaN) - gap) <= MASS_TOLERANCE * before
	);
	if (Math.abs(gap) <= MASS_TOLERANCE * before || carried) return [];
	const verb = gap > 0 ? 'gains' : 'loses';
	const message = `Step ${step.id} ${verb} ${Math.abs(gap).toFixed(2)} g/mol (${before.toFixed(2)} before, ${after.toFixed(2)} after). Is a reagent or by-product missing from the step?`;
	return [{ level: 'caution', code: 'mass-imbalance', message, stepId: step.id }];
}

/** Species that nothing leads to from the charge: their curves stay at zero. */
function unreached(network: Network, charge: ChargeById): NetworkIssue[] {
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
function smallExcess(
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

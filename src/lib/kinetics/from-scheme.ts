/**
 * From a scheme as people write it (units on every number) to the engine's network (SI throughout).
 *
 * Nothing is guessed: a constant without a usable unit becomes a `unit-invalid` issue naming what is accepted, and its step
 * is left out of the network. An activation energy that is left out is 0 (the constant holds at the reference temperature
 * alone); one that is to be fitted takes its guess, or 0 without one.
 */
import type { z } from 'zod';
import { isFitted, type Fittable } from '../schemas/quantity';
import {
	isEquilibrium,
	type equilibriumSchema,
	type RateLawContent,
	type SchemeContent,
	type StepContent
} from '../schemas/scheme';
import type { EquilibriumLaw, Network, NetworkIssue, RateLaw, Step } from './types';
import { toSi, UnitError, type Dimension, type UnitContext, type UnitQuantity } from './units';

export interface SchemeReading {
	network: Network;
	issues: NetworkIssue[];
}

export interface SchemeReadingOptions {
	/**
	 * What a step without products is when it does not say `loss`: a loss (the default, as in the JSON interface), or a step
	 * that is still being drawn and is left out with an issue (the scheme page).
	 */
	emptyProducts?: 'loss' | 'unfinished';
}

/** Reads a scheme into the engine's words. Steps that cannot be read are left out, each with an issue of level `stop`. */
export function toNetwork(content: SchemeContent, options: SchemeReadingOptions = {}): SchemeReading {
	const issues: NetworkIssue[] = [];
	const network: Network = {
		species: content.species.map(({ id, name, role, molarMassGPerMol }) => ({
			id,
			name: name || id,
			...(role ? { role } : {}),
			...(molarMassGPerMol === undefined ? {} : { molarMassGPerMol })
		})),
		steps: [],
		referenceTemperatureK: 298.15
	};
	const reference = attempt(issues, {}, 'reference temperature', () =>
		toSi(content.referenceTemperature, 'temperature')
	);
	if (reference !== null) network.referenceTemperatureK = reference;
	for (const step of content.steps) {
		const read = readStep(step, options, issues);
		if (read) network.steps.push(read);
	}
	return { network, issues };
}

function readStep(step: StepContent, options: SchemeReadingOptions, issues: NetworkIssue[]): Step | null {
	if (step.reactant === '') return dangling(step, 'has no reactant yet', issues);
	const unfinished =
		step.loss === false || (step.loss === undefined && options.emptyProducts === 'unfinished');
	if (step.products.length === 0 && unfinished) return dangling(step, 'leads nowhere yet', issues);
	const forward = attempt(issues, { stepId: step.id }, `step ${step.id}, forward constant`, () =>
		readLaw(step.forward)
	);
	const reverse = step.reverse
		? attempt(issues, { stepId: step.id }, `step ${step.id}, reverse constant`, () =>
				isEquilibrium(step.reverse) ? readEquilibrium(step.reverse) : readLaw(step.reverse as RateLawContent)
			)
		: null;
	if (!forward || (step.reverse && !reverse)) return null;
	return {
		id: step.id,
		reactant: step.reactant,
		products: step.products.map((p) => ({ ...p })),
		forward,
		reverse
	};
}

function dangling(step: StepContent, what: string, issues: NetworkIssue[]): null {
	issues.push({
		level: 'caution',
		code: 'step-dangling',
		stepId: step.id,
		message: `Step ${step.id} ${what} and is left out. Give it a reactant and a product, or mark it as a loss.`
	});
	return null;
}

function readLaw(law: RateLawContent): RateLaw {
	const excess = (law.excess ?? []).map((entry) => ({ ...entry }));
	const excessOrder = excess.reduce((sum, entry) => sum + entry.order, 0);
	return {
		form: law.form ?? 'arrhenius',
		kRefPerS: toSi(law.kRef, 'rate constant', { excessOrder }),
		energyJPerMol: fittableSi(law.activationEnergy, 'molar energy'),
		excess
	};
}

function readEquilibrium(law: z.infer<typeof equilibriumSchema>): EquilibriumLaw {
	return {
		form: 'equilibrium',
		kEqRef: toSi(law.equilibriumConstant, 'equilibrium constant'),
		enthalpyJPerMol: fittableSi(law.enthalpy, 'molar energy')
	};
}

/** SI value of a quantity that may be fitted: its value, its guess, or `otherwise` when there is neither. @throws UnitError */
export function fittableSi(
	quantity: Fittable | undefined,
	dimension: Dimension,
	otherwise = 0,
	context: UnitContext = {}
): number {
	if (!quantity) return otherwise;
	const known: UnitQuantity | undefined = isFitted(quantity) ? quantity.guess : quantity;
	return known ? toSi(known, dimension, context) : otherwise;
}

function attempt<T>(
	issues: NetworkIssue[],
	where: Pick<NetworkIssue, 'stepId' | 'speciesId'>,
	what: string,
	read: () => T
): T | null {
	try {
		return read();
	} catch (error) {
		if (!(error instanceof UnitError)) throw error;
		const message = `${what.charAt(0).toUpperCase()}${what.slice(1)}: ${error.message}`;
		issues.push({ level: 'stop', code: 'unit-invalid', message, ...where });
		return null;
	}
}

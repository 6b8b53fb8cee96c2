/**
 * Rate constants of a run as affine functions of the estimated parameters.
 *
 *     ln k(T) = base − energy·(1/T − 1/T_ref)/R [+ ln(T/T_ref) in Eyring's form]
 *     k_reverse = k_forward/K: ln K and ΔH° are taken off base and energy
 *
 * base holds ln k_ref and the species in excess to their orders.
 *
 * Sources: Arrhenius and Eyring laws as in `rate-laws.ts`; van 't Hoff for K(T).
 */
import type { Network, RateLaw } from '../types';
import { GAS_CONSTANT, inverseTemperatureGap } from '../rate-laws';
import { constantLinear, linearOf, scaleLinear, sumLinear, type Linear } from './affine';
import type { RunModel } from './run-model';
import type { Slot } from './slots';
import type { Direction } from './spectral';

/** ln k(T) = base − energy·(1/T − 1/T_ref)/R [+ ln(T/T_ref) in Eyring's form]. */
export interface RateForm {
	base: Linear;
	energy: Linear;
	eyring: boolean;
}

/** Fills directions, names, forms and constants of a run. @throws RangeError in words */
export function addDirections(
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

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
import { localId } from './local-slots';
import type { RunModel } from './run-model';
import type { Slot } from './slots';
import type { Direction } from './spectral';

/** ln k(T) = base − energy·(1/T − 1/T_ref)/R [+ ln(T/T_ref) in Eyring's form]. */
export interface RateForm {
	base: Linear;
	energy: Linear;
	eyring: boolean;
}

/** What the constants of one run are read from. */
interface Source {
	model: RunModel;
	referenceK: number;
	slots: Map<string, Slot>;
	free: Slot[];
	excess: Record<string, number>;
}

/** Fills directions, names, forms and constants of a run. @throws RangeError in words */
export function addDirections(
	model: RunModel,
	network: Network,
	slots: Map<string, Slot>,
	free: Slot[],
	excess: Record<string, number>
): void {
	const source: Source = { model, referenceK: network.referenceTemperatureK, slots, free, excess };
	const index = new Map(network.species.map((s, i) => [s.id, i]));
	const push = (
		step: string,
		sense: 'forward' | 'reverse',
		from: string,
		products: Direction['products'],
		form: RateForm | null
	) => {
		if (!form || form.base.constant === -Infinity) return;
		model.directions.push({ from: index.get(from)!, products });
		model.names.push({ step, sense });
		model.rateForms.push(form);
		model.lnRates.push(lnRateAt(form, model.temperatureK, network.referenceTemperatureK));
	};
	for (const step of network.steps) {
		const forward = rateForm(`${step.id}.forward`, step.forward, source);
		const products = step.products.map((p) => ({ to: index.get(p.species)!, coefficient: p.coefficient }));
		push(step.id, 'forward', step.reactant, products, forward);
		if (!step.reverse) continue;
		if (step.products.length !== 1 || step.products[0].coefficient !== 1)
			throw new RangeError(`step ${step.id} is reversible but not one to one; split it into two steps.`);
		const reverse =
			step.reverse.form === 'equilibrium'
				? forward && throughEquilibrium(forward, step.id, source)
				: rateForm(`${step.id}.reverse`, step.reverse, source);
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

/** Null for a local constant of a step that the run's charge never reaches. */
function rateForm(name: string, law: RateLaw, source: Source): RateForm | null {
	const { slots, free, excess } = source;
	const parts: Linear[] = [];
	for (const { species, order } of law.excess) {
		const concentration = excess[species];
		if (concentration === undefined || concentration < 0)
			throw new RangeError(
				`the concentration of ${species}, held in excess by ${name}, is missing. Give it under "excess".`
			);
		parts.push(constantLinear(order === 0 ? 0 : order * Math.log(concentration)));
	}
	const energy = `${name}.activationEnergy`;
	const shared: RateForm = {
		base: sumLinear(linearOf(slots, free, `${name}.kRef`), ...parts),
		energy: slots.has(energy) ? linearOf(slots, free, energy) : constantLinear(0),
		eyring: law.form === 'eyring'
	};
	if (slots.has(`${name}.kRef`)) return shared;
	const own = localId(source.model.id, `${name}.kRef`);
	return slots.has(own)
		? atRun(sumLinear(linearOf(slots, free, own), ...parts), shared.energy, shared.eyring, source)
		: null;
}

/**
 * A constant that is known at the run's own temperature, as a form about T_ref; with one temperature that constant is all there is.
 *     ln k(T) = ln k_run − (E/R)(1/T − 1/T_run) [+ ln(T/T_run)]
 */
function atRun(lnConstant: Linear, energy: Linear, eyring: boolean, { model, referenceK }: Source): RateForm {
	if (!model.log) return { base: lnConstant, energy: constantLinear(0), eyring: false };
	const gap = inverseTemperatureGap(model.temperatureK, referenceK) / GAS_CONSTANT;
	const ratio = constantLinear(eyring ? -Math.log(model.temperatureK / referenceK) : 0);
	return { base: sumLinear(lnConstant, scaleLinear(energy, gap), ratio), energy, eyring };
}

/** k_reverse = k_forward/K: ln K and ΔH° are taken off. */
function throughEquilibrium(forward: RateForm, step: string, source: Source): RateForm | null {
	const { slots, free, model, referenceK } = source;
	const shared = `${step}.reverse.equilibriumConstant`;
	const id = `${step}.reverse.enthalpy`;
	const enthalpy = slots.has(id) ? linearOf(slots, free, id) : null;
	const minus = (from: Linear, less: Linear): Linear => sumLinear(from, scaleLinear(less, -1));
	if (slots.has(shared))
		return {
			base: minus(forward.base, linearOf(slots, free, shared)),
			energy: enthalpy ? minus(forward.energy, enthalpy) : forward.energy,
			eyring: forward.eyring
		};
	const own = localId(model.id, shared);
	if (!slots.has(own)) return null;
	const equilibrium = atRun(linearOf(slots, free, own), enthalpy ?? constantLinear(0), false, source);
	// At one temperature T_run the forward constant is its whole form there, and so is K.
	const here: RateForm = model.log
		? forward
		: { base: lnRateAt(forward, model.temperatureK, referenceK), energy: constantLinear(0), eyring: false };
	return {
		base: minus(here.base, equilibrium.base),
		energy: minus(here.energy, equilibrium.energy),
		eyring: here.eyring
	};
}

/**
 * Every number of a fit request that could be a parameter, by its id, with its unit, scale, state and starting value.
 *
 * Rate constants, equilibrium constants and response factors are positive and vary over decades: they are estimated as
 * natural logarithms. Energies (J/mol), amounts (mol/L) and time offsets (s) are estimated as they are; amounts enter the
 * curves linearly and may be zero.
 *
 * Ids: `<step>.forward.kRef`, `<step>.forward.activationEnergy`, `<step>.reverse.kRef`, `<step>.reverse.activationEnergy`,
 * `<step>.reverse.equilibriumConstant`, `<step>.reverse.enthalpy`, `<run>.initial.<species>`, `<run>.timeOffset`,
 * `<channel>.responseFactor`.
 */
import type { FitFinding, FitRequest } from '../../schemas/fit';
import { isFitted, type Fittable, type Quantity } from '../../schemas/quantity';
import { isEquilibrium, type RateLawContent, type StepContent } from '../../schemas/scheme';
import { fromSi, isUnitOf, toSi, UnitError, type Dimension, type UnitContext } from '../units';
import { DIMENSIONS, LN_KINDS, readValue, reportUnit, type SlotKind } from './slot-units';

export { isRelativeUnit, type SlotKind } from './slot-units';

export interface Slot {
	id: string;
	kind: SlotKind;
	scale: 'ln' | 'linear';
	/** Unit in which the value is reported. */
	unit: string;
	dimension: Dimension | null;
	context: UnitContext;
	/** Start or fixed value in the engine's unit; NaN where it has to be found from the data. */
	value: number;
	state: 'fitted' | 'fixed' | 'tied';
	/** Whether the person gave the starting value. */
	guessed: boolean;
	/** Bounds in the engine's unit, as asked for (±Infinity where not). */
	lower: number;
	upper: number;
	tie: { to: string; factor: number } | null;
	/** Whether the result lists it even when it is fixed. */
	reported: boolean;
	run: string | null;
	step: string | null;
}

export interface SlotReading {
	slots: Map<string, Slot>;
	issues: FitFinding[];
}

const stop = (code: string, message: string, parameters: string[] = []): FitFinding => ({
	code,
	level: 'stop',
	message,
	...(parameters.length ? { parameters } : {})
});

/** The id of a run: its own, or r1, r2, … by position. */
export const runId = (run: FitRequest['runs'][number], index: number): string => run.id ?? `r${index + 1}`;

/** Value in the unit in which the slot is reported. */
export const toReported = (slot: Slot, si: number): number =>
	slot.dimension ? fromSi(si, slot.unit, slot.dimension, slot.context) : si;

/** Value in the engine's unit from the unit in which the slot is reported. */
export const fromReported = (slot: Slot, reported: number): number =>
	slot.dimension ? toSi({ value: reported, unit: slot.unit }, slot.dimension, slot.context) : reported;

/** Length of one unit of the estimation scale, in the reported unit, for a linear slot (offsets such as 273.15 left out). */
export const reportedFactor = (slot: Slot): number => toReported(slot, 1) - toReported(slot, 0);

/** Reads every slot of a request; problems become issues and leave the slot out. */
export function readSlots(request: FitRequest): SlotReading {
	const reader = new SlotReader();
	for (const step of request.steps) reader.step(step);
	request.runs.forEach((run, index) => reader.run(run, runId(run, index), request));
	reader.apply(request.options);
	return { slots: reader.slots, issues: reader.issues };
}

class SlotReader {
	readonly slots = new Map<string, Slot>();
	readonly issues: FitFinding[] = [];

	step(step: StepContent): void {
		if (step.reactant === '') return;
		this.law(step, 'forward', step.forward);
		const { reverse } = step;
		if (!reverse) return;
		if (!isEquilibrium(reverse)) {
			this.law(step, 'reverse', reverse);
			return;
		}
		const base = { step: step.id, run: null, reported: true };
		this.add(
			`${step.id}.reverse.equilibriumConstant`,
			'equilibrium',
			{ fit: true, guess: reverse.equilibriumConstant },
			base
		);
		if (reverse.enthalpy) this.add(`${step.id}.reverse.enthalpy`, 'enthalpy', reverse.enthalpy, base);
	}

	private law(step: StepContent, direction: 'forward' | 'reverse', law: RateLawContent): void {
		const base = { step: step.id, run: null, reported: true };
		const excessOrder = (law.excess ?? []).reduce((sum, e) => sum + e.order, 0);
		this.add(
			`${step.id}.${direction}.kRef`,
			'rate',
			{ fit: true, guess: law.kRef },
			{ ...base, context: { excessOrder } }
		);
		if (law.activationEnergy)
			this.add(`${step.id}.${direction}.activationEnergy`, 'energy', law.activationEnergy, base);
	}

	run(run: FitRequest['runs'][number], id: string, request: FitRequest): void {
		for (const [species, amount] of Object.entries(run.initial)) {
			const molarMassGPerMol = request.species.find((s) => s.id === species)?.molarMassGPerMol;
			this.add(`${id}.initial.${species}`, 'amount', amount, {
				run: id,
				step: null,
				reported: isFitted(amount),
				context: molarMassGPerMol === undefined ? {} : { molarMassGPerMol }
			});
		}
		if (run.timeOffset)
			this.add(`${id}.timeOffset`, 'offset', run.timeOffset, {
				run: id,
				step: null,
				reported: true,
				unit: run.timeUnit
			});
		for (const channel of run.channels) {
			const name = `${channel.id}.responseFactor`;
			const known = this.slots.get(name);
			if (
				!channel.responseFactor ||
				(known && (known.state === 'fitted' || !isFitted(channel.responseFactor)))
			)
				continue;
			this.add(name, 'response', channel.responseFactor, { run: null, step: null, reported: true });
		}
	}

	private add(
		id: string,
		kind: SlotKind,
		given: Fittable,
		where: {
			step: string | null;
			run: string | null;
			reported: boolean;
			context?: UnitContext;
			unit?: string;
		}
	): void {
		const known: Quantity | undefined = isFitted(given) ? given.guess : given;
		const dimension = DIMENSIONS[kind];
		const unit = reportUnit(kind, known, where.unit);
		const context = where.context ?? {};
		let value = NaN;
		try {
			if (known) value = readValue(known, kind, dimension, context);
		} catch (error) {
			if (!(error instanceof UnitError)) throw error;
			this.issues.push(stop('unit-invalid', `${id}: ${error.message}`, [id]));
			return;
		}
		const scale = LN_KINDS.has(kind) ? 'ln' : 'linear';
		if (scale === 'ln' && isFitted(given) && value <= 0 && kind === 'response') value = NaN;
		this.slots.set(id, {
			id,
			kind,
			scale,
			unit,
			dimension: dimension && isUnitOf(unit, dimension, context) ? dimension : null,
			context,
			value,
			state: isFitted(given) ? 'fitted' : 'fixed',
			guessed: known !== undefined && Number.isFinite(value) && (scale === 'linear' || value > 0),
			lower: -Infinity,
			upper: Infinity,
			tie: null,
			reported: where.reported,
			run: where.run,
			step: where.step
		});
	}

	apply(options: FitRequest['options']): void {
		for (const id of options.fixed) this.fix(id);
		for (const tie of options.tied) this.tie(tie);
		for (const id of this.slots.keys()) this.checkTieCycle(id);
		for (const [id, bounds] of Object.entries(options.bounds)) this.bound(id, bounds);
	}

	private known(id: string, where: string): Slot | null {
		const slot = this.slots.get(id);
		if (slot) return slot;
		const near = [...this.slots.keys()].slice(0, 6).join(', ');
		this.issues.push(
			stop(
				'parameter-unknown',
				`"${id}" in ${where} is not a parameter of this fit. Parameters are, for example: ${near}.`,
				[id]
			)
		);
		return null;
	}

	private fix(id: string): void {
		const slot = this.known(id, 'options.fixed');
		if (!slot) return;
		if (!Number.isFinite(slot.value)) {
			this.issues.push(
				stop(
					'fixed-without-value',
					`${id} is to be held fixed but has no value. Give one, or let it be fitted.`,
					[id]
				)
			);
			return;
		}
		slot.state = 'fixed';
		slot.reported = true;
	}

	private tie({ parameter, to, factor }: { parameter: string; to: string; factor: number }): void {
		const slot = this.known(parameter, 'options.tied');
		const target = this.known(to, 'options.tied');
		if (!slot || !target) return;
		if (parameter === to) {
			this.issues.push(
				stop(
					'tied-to-itself',
					`${parameter} is tied to itself. Tie it to another parameter, or remove the tie.`,
					[parameter]
				)
			);
			return;
		}
		if (slot.kind !== target.kind && !(slot.scale === target.scale && slot.dimension === target.dimension)) {
			this.issues.push(
				stop('tie-of-unlike', `${parameter} cannot be tied to ${to}: they are different kinds of quantity.`, [
					parameter,
					to
				])
			);
			return;
		}
		if (!(factor > 0) && slot.scale === 'ln') {
			this.issues.push(
				stop('tie-factor', `The factor of the tie of ${parameter} must be above zero; found ${factor}.`, [
					parameter
				])
			);
			return;
		}
		slot.state = 'tied';
		slot.tie = { to, factor };
		slot.reported = true;
	}

	private checkTieCycle(id: string): void {
		const seen = new Set<string>();
		let slot = this.slots.get(id);
		while (slot?.tie) {
			if (seen.has(slot.id)) {
				this.issues.push(
					stop('tie-circular', `The ties of ${[...seen].join(', ')} form a circle.`, [...seen])
				);
				for (const member of seen) this.slots.get(member)!.tie = null;
				return;
			}
			seen.add(slot.id);
			slot = this.slots.get(slot.tie.to);
		}
	}

	private bound(id: string, bounds: { lower?: Quantity; upper?: Quantity }): void {
		const slot = this.known(id, 'options.bounds');
		if (!slot) return;
		try {
			if (bounds.lower) slot.lower = readValue(bounds.lower, slot.kind, slot.dimension, slot.context);
			if (bounds.upper) slot.upper = readValue(bounds.upper, slot.kind, slot.dimension, slot.context);
		} catch (error) {
			if (!(error instanceof UnitError)) throw error;
			this.issues.push(stop('unit-invalid', `Bounds of ${id}: ${error.message}`, [id]));
			return;
		}
		if (!(slot.lower <= slot.upper) || (slot.scale === 'ln' && slot.upper <= 0))
			this.issues.push(
				stop(
					'bounds-invalid',
					`The bounds of ${id} leave no value: lower ${slot.lower}, upper ${slot.upper} (SI).`,
					[id]
				)
			);
	}
}

/**
 * Reads the slots of a request: from its steps and runs, then what the options say of them (`slot-options.ts`).
 */
import type { FitFinding, FitRequest } from '../../schemas/fit';
import { isFitted, type Fittable, type Quantity } from '../../schemas/quantity';
import { isEquilibrium, type RateLawContent, type StepContent } from '../../schemas/scheme';
import { isUnitOf, UnitError, type UnitContext } from '../units';
import { stop } from './finding';
import { localise } from './local-slots';
import { SlotOptions } from './slot-options';
import { DIMENSIONS, LN_KINDS, readValue, reportUnit, type SlotKind } from './slot-units';
import { runId, type Slot } from './slots';

export interface SlotReading {
	slots: Map<string, Slot>;
	issues: FitFinding[];
}

/** Reads every slot of a request; problems become issues and leave the slot out. */
export function readSlots(request: FitRequest): SlotReading {
	const reader = new SlotReader();
	for (const step of request.steps) reader.step(step);
	request.runs.forEach((run, index) => reader.run(run, runId(run, index), request));
	localise(request, reader.slots, reader.issues);
	new SlotOptions(reader.slots, reader.issues).apply(request.options);
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
			step: where.step,
			localOf: null
		});
	}
}

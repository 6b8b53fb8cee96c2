/**
 * What the options of a request say of its parameters: held fixed, tied to another, bounded.
 */
import type { FitFinding, FitRequest } from '../../schemas/fit';
import type { Quantity } from '../../schemas/quantity';
import { UnitError } from '../units';
import { stop } from './finding';
import { isLocalConstant } from './local-slots';
import { readValue } from './slot-units';
import type { Slot } from './slots';

type Tie = FitRequest['options']['tied'][number];

/** Applies options to slots; problems become issues. */
export class SlotOptions {
	constructor(
		private readonly slots: Map<string, Slot>,
		private readonly issues: FitFinding[]
	) {}

	apply(options: FitRequest['options']): void {
		for (const id of options.fixed) this.fix(id);
		for (const tie of options.tied) for (const each of this.eachRun(tie)) this.tie(each);
		for (const id of this.slots.keys()) this.checkTieCycle(id);
		for (const [id, bounds] of Object.entries(options.bounds)) this.bound(id, bounds);
	}

	/** A tie of two constants that are both local ties them in each run. */
	private eachRun(tie: Tie): Tie[] {
		const copies = (id: string) => [...this.slots.values()].filter((s) => s.localOf === id);
		const followers = copies(tie.parameter);
		const leaders = copies(tie.to);
		const split = [tie.parameter, tie.to].filter((id) => copies(id).length > 0);
		if (split.length === 0) return [tie];
		if (split.length === 1) {
			this.issues.push(
				stop(
					'tie-local',
					`${tie.parameter} is tied to ${tie.to}, but only ${split[0]} has a value of its own in each run. Make both local, or both shared.`,
					[tie.parameter, tie.to]
				)
			);
			return [];
		}
		return followers.flatMap((follower) => {
			const leader = leaders.find((s) => s.run === follower.run);
			return leader ? [{ parameter: follower.id, to: leader.id, factor: tie.factor }] : [];
		});
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

	private tie({ parameter, to, factor }: Tie): void {
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
		if (isLocalConstant(parameter) !== isLocalConstant(to)) {
			this.issues.push(
				stop(
					'tie-local',
					`${parameter} cannot be tied to ${to}: one holds at the temperature of its run, the other at the reference temperature.`,
					[parameter, to]
				)
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

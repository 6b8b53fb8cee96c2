/**
 * Every number of a fit request that could be a parameter, by its id, with its unit, scale, state and starting value.
 *
 * Rate constants, equilibrium constants and response factors are positive and vary over decades: they are estimated as
 * natural logarithms. Energies (J/mol), amounts (mol/L) and time offsets (s) are estimated as they are; amounts enter the
 * curves linearly and may be zero.
 *
 * Ids: `<step>.forward.kRef`, `<step>.forward.activationEnergy`, `<step>.reverse.kRef`, `<step>.reverse.activationEnergy`,
 * `<step>.reverse.equilibriumConstant`, `<step>.reverse.enthalpy`, `<run>.initial.<species>`, `<run>.timeOffset`,
 * `<channel>.responseFactor`; local to a run: `local-slots.ts`.
 */
import type { FitRequest } from '../../schemas/fit';
import { fromSi, toSi, type Dimension, type UnitContext } from '../units';
import type { SlotKind } from './slot-units';

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
	/** The shared id that it stands in for, where it is local to a run. */
	localOf: string | null;
}

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

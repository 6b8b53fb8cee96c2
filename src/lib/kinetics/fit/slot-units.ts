/**
 * Units of the parameters of a fit: which scale and dimension each kind has, and how a stated value is read.
 */
import type { Quantity } from '../../schemas/quantity';
import { isUnitOf, toSi, type Dimension, type UnitContext } from '../units';

export type SlotKind = 'rate' | 'energy' | 'equilibrium' | 'enthalpy' | 'amount' | 'response' | 'offset';

/** Kinds that are estimated as natural logarithms. */
export const LN_KINDS = new Set<SlotKind>(['rate', 'equilibrium', 'response']);

export const DIMENSIONS: Record<SlotKind, Dimension | null> = {
	rate: 'rate constant',
	energy: 'molar energy',
	equilibrium: 'equilibrium constant',
	enthalpy: 'molar energy',
	amount: 'concentration',
	response: null,
	offset: 'time'
};

const DEFAULT_UNITS: Record<SlotKind, string> = {
	rate: '1/s',
	energy: 'kJ/mol',
	equilibrium: '1',
	enthalpy: 'kJ/mol',
	amount: 'mol/L',
	response: '1',
	offset: 's'
};

export const reportUnit = (kind: SlotKind, known: Quantity | undefined, preferred?: string): string =>
	known?.unit ?? preferred ?? DEFAULT_UNITS[kind];

/** Charges may be stated relative to the charge itself ("fraction", "area"): such numbers are used as they are. */
export function readValue(
	given: Quantity,
	kind: SlotKind,
	dimension: Dimension | null,
	context: UnitContext
): number {
	if (dimension === null) return given.value;
	if (kind === 'amount' && isRelativeUnit(given.unit, context)) return given.value;
	return toSi(given, dimension, context);
}

/** A unit that only says how large a signal is beside another of its kind. */
export const isRelativeUnit = (unit: string, context: UnitContext = {}): boolean =>
	/^(fraction|rel\.?|relative|a\.?u\.?|area|counts|mAU|AU)\b/i.test(unit.trim()) &&
	!isUnitOf(unit, 'concentration', context);

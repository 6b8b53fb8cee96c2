/** What was charged, and whether the values can be compared with it. */
import { isFitted, type Quantity } from '$lib/schemas/quantity';
import type { ChannelContent } from '$lib/schemas/run';
import type { ValueUnit } from '$lib/schemas/sheet';
import type { Examination } from './examination';
import { convertUnit } from './limits';

export const SHARES: ValueUnit[] = ['% of charge', 'mol %', 'fraction of charge'];

/** Total charge in mol/L when every amount is fixed and molar; null otherwise. */
export function molarCharge(ex: Examination): number | null {
	const amounts = Object.values(ex.mapping.conditions?.initial ?? {});
	if (amounts.length === 0) return null;
	let total = 0;
	for (const amount of amounts) {
		if (!isFitted(amount) && amount.value === 0) continue;
		const value = isFitted(amount) ? null : convertUnit(amount.value, molarName(amount), 'mol/L');
		if (value === null) return null;
		total += value;
	}
	return total > 0 ? total : null;
}

export const molarName = (q: Quantity) =>
	q.unit === 'M' ? 'mol/L' : q.unit === 'mM' ? 'mmol/L' : q.unit.replace('µ', 'u');

/** Amounts and values must be comparable: concentrations with a molar charge, shares with a charge that they can refer to. */
export function coherent(ex: Examination, contents: ChannelContent[]): boolean {
	const molar = contents.some((c) => c.unit === 'mol/L');
	const shares = contents.some((c) => SHARES.includes(c.unit as ValueUnit));
	const initial = Object.values(ex.mapping.conditions?.initial ?? {});
	const relative = initial.some((f) => !isFitted(f) && f.unit.includes('%'));
	if (molar && (relative || (shares && initial.length > 0 && molarCharge(ex) === null))) {
		ex.needs.push({
			field: 'initial',
			message:
				'Some values are concentrations: give the charge in mol/L as a fixed number, so that all values count alike.'
		});
		return false;
	}
	const allRelative = initial.every((f) =>
		isFitted(f) ? !f.guess || f.guess.unit.includes('%') : f.unit.includes('%')
	);
	if (shares && initial.length > 0 && !allRelative && molarCharge(ex) === null) {
		ex.needs.push({
			field: 'initial',
			message:
				'The values are shares of the charge: give every amount charged in mol/L as a fixed number, or all of them in %.'
		});
		return false;
	}
	return true;
}

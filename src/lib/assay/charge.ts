/** What was charged, and whether the values can be compared with it. */
import { isFitted, type Quantity } from '$lib/schemas/quantity';
import type { ChannelContent } from '$lib/schemas/run';
import type { ValueUnit } from '$lib/schemas/sheet';
import type { Examination } from './examination';
import { convertUnit } from './limits';
import type { Point } from './timepoints';
import { figure } from './wording';

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

/** A charge and a first sample further apart than this are no matter of a slow first sampling. */
const APART = 5;

/** B33: the charge given against the sample at time zero: a wrong unit, a dilution or a wrong decimal shows here first. */
export function askChargeApart(ex: Examination, points: Point[], contents: ChannelContent[]): void {
	if (ex.mapping.conditions?.timeOffset) return;
	const zero = points.find((p) => p.time === 0);
	if (!zero) return;
	for (const content of contents) {
		const [[id, weight] = ['', 0], ...more] = Object.entries(content.weights);
		const given = ex.mapping.conditions?.initial[id];
		const found = zero.values.get(content.id);
		if (more.length > 0 || content.unit !== 'mol/L' || !given || isFitted(given)) continue;
		const charged = convertUnit(given.value, molarName(given), 'mol/L');
		if (charged === null || charged <= 0 || typeof found !== 'number' || found <= 0) continue;
		const times = (charged * weight) / found;
		if (times <= APART && times >= 1 / APART) continue;
		const cell = zero.cells.get(content.id) ?? ex.at(zero.row, ex.mapping.block.firstColumn);
		const taken = ex.ask({
			rule: 'B33',
			level: 'ask',
			cells: [cell],
			key: `charge-${content.id}`,
			found: `${figure(found)} mol/L at time zero, ${figure(charged)} mol/L charged`,
			expected: 'a first sample near the charge',
			message: `${cell} gives ${figure(found)} mol/L of ${id} at time zero, and ${figure(charged)} mol/L is given as its charge: ${times > 1 ? `${figure(Number(times.toPrecision(3)))} times as much` : `1/${figure(Number((1 / times).toPrecision(3)))} of it`}. Correct the charge or the unit, or keep both?`,
			options: [{ key: 'keep', label: 'Keep both' }]
		});
		if (taken)
			ex.conversions.push(
				`${cell}: kept at ${figure(found)} mol/L beside a charge of ${figure(charged)} mol/L.`
			);
	}
}

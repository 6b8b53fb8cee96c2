/**
 * B4: values beyond what any liquid can hold say that the unit above them is wrong, or the value is. Pure water is 55.5 mol/L and
 * no liquid of process chemistry holds more; the densest organic liquid, diiodomethane, has 3.3 kg/L (CRC Handbook of Chemistry and
 * Physics, physical constants; values from memory). No share of a solution or of its peaks exceeds 100 %.
 */
import type { ValueUnit } from '$lib/schemas/sheet';
import { type Channel, channelName } from './channels';
import type { Examination } from './examination';
import { askSpots, cellsOf, letter, type NumberSpot, ofKind, type Spot } from './spots';
import { figure, someOf } from './wording';

/** Above this a value is asked about, in its own unit; the smaller unit is the one that is usually meant. */
const CEILING: Partial<Record<ValueUnit, { most: number; why: string; smaller?: ValueUnit }>> = {
	'mol/L': { most: 60, why: 'pure water is 55.5 mol/L', smaller: 'mmol/L' },
	'mmol/L': { most: 6e4, why: 'pure water is 55 500 mmol/L', smaller: 'umol/L' },
	'umol/L': { most: 6e7, why: 'pure water is 55.5 mol/L' },
	'g/L': { most: 3500, why: 'organic liquids weigh at most 3300 g/L', smaller: 'mg/L' },
	'mg/mL': { most: 3500, why: 'organic liquids weigh at most 3300 mg/mL', smaller: 'mg/L' },
	'mg/L': { most: 3.5e6, why: 'organic liquids weigh at most 3300 g/L' },
	'fraction of charge': { most: 5, why: '1 is the whole charge', smaller: '% of charge' },
	'area %': { most: 101, why: 'all peaks together are 100 %' },
	'% w/w': { most: 101, why: 'the whole solution is 100 %' }
};

export function askDense(ex: Examination, channel: Channel, spots: Spot[]): void {
	const { unit } = channel;
	const ceiling = unit === null ? undefined : CEILING[unit];
	if (!ceiling) return;
	const numbers: NumberSpot[] = ofKind(spots, 'number').filter((s) => s.reading.value !== 0);
	const beyond = numbers.filter((s) => s.reading.value > ceiling.most);
	if (beyond.length === 0) return;
	const most = Math.max(...beyond.map((s) => s.reading.value));
	// A single slip among plausible values is no matter of the column's unit.
	const smaller = beyond.length * 2 >= numbers.length ? ceiling.smaller : undefined;
	const taken = askSpots(
		ex,
		beyond,
		{
			rule: 'B4',
			level: 'ask',
			key: `${letter(channel, beyond)}-dense`,
			found: `${figure(most)} ${unit}`,
			expected: `at most ${figure(ceiling.most)} ${unit}`,
			message: `${channelName(channel)} reaches ${figure(most)} ${unit} (${someOf(cellsOf(beyond))}), more than can be: ${ceiling.why}. Is the unit or a value wrong?`
		},
		[
			...(smaller ? [{ key: smaller, label: `The values are in ${smaller}` }] : []),
			{ key: 'keep', label: 'Keep as it stands' }
		]
	);
	if (taken?.key === 'keep')
		ex.conversions.push(`${someOf(cellsOf(beyond), 8)}: kept at up to ${figure(most)} ${unit}.`);
	if (!taken || taken.key !== smaller) return;
	channel.unit = smaller;
	if ('unit' in channel.mapping) channel.mapping.unit = smaller;
	ex.conversions.push(`Unit of ${channelName(channel)}: ${smaller}, as chosen, not ${unit}.`);
}

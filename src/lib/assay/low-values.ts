/** B20: negative values are noise down to −LOQ. B11: a typed 0 stays 0. */
import type { Channel } from './channels';
import type { Examination } from './examination';
import { figure, plural, someOf } from './wording';
import { type StatedLimits, suggestLimit } from './limits';
import { askSpots, cellsOf, letter, ofKind, type Spot } from './spots';

export function settleZerosAndNegatives(
	ex: Examination,
	channel: Channel,
	spots: Spot[],
	limits: StatedLimits
): void {
	const numbers = ofKind(spots, 'number');
	const low = numbers.filter(
		(s) => s.reading.value < 0 && (channel.loq === null || s.reading.value < -channel.loq)
	);
	const kept = new Set(numbers);
	if (low.length > 0) {
		const taken = askSpots(
			ex,
			low,
			{
				rule: 'B20',
				level: 'ask',
				key: `${letter(channel, low)}-negative`,
				found: `negative: ${figure(low[0].reading.value)}`,
				expected:
					channel.loq === null
						? 'values from zero upward, or noise above −LOQ'
						: `values above −${figure(channel.loq)}`,
				message: `${someOf(cellsOf(low))} ${low.length === 1 ? 'is' : 'are'} negative (${figure(low[0].reading.value)})${channel.loq === null ? ' and no LOQ is known' : `, below −LOQ`}. Keep as noise, or leave as missing?`
			},
			[{ key: 'keep', label: 'Keep as measured' }]
		);
		if (!taken) low.forEach((s) => kept.delete(s));
		if (taken?.key === 'keep')
			ex.conversions.push(`${someOf(cellsOf(low), 8)}: negative values kept as measured.`);
	}
	for (const s of kept) if (s.reading.kind === 'number') s.set(s.reading.value);
	offerCensoring(
		ex,
		channel,
		numbers.filter((s) => s.reading.kind === 'number' && s.reading.value === 0),
		limits
	);
}

/** B11: a typed 0 stays 0; where the LOQ is known or stated on the sheet, "below LOQ" is offered. */
function offerCensoring(ex: Examination, channel: Channel, zeros: Spot[], limits: StatedLimits): void {
	const stated = suggestLimit(limits, channel, 'loq');
	const loq = channel.loq ?? stated?.value;
	if (zeros.length === 0 || loq === undefined) return;
	const where = channel.loq === null && stated ? `, by ${stated.source}` : '';
	const taken = ex.note({
		rule: 'B11',
		cells: cellsOf(zeros),
		key: `${letter(channel, zeros)}-zero`,
		found: plural(zeros.length, 'typed 0'),
		expected: 'a measured zero, or a limit',
		message: `${someOf(cellsOf(zeros))}: a typed 0 stays 0. The LOQ of ${channel.label} is ${figure(loq)}${where}; "below LOQ" may be what is meant.`,
		options: [
			{ key: 'keep', label: 'Keep 0' },
			{ key: 'censor', label: `Take as below ${figure(loq)}` }
		]
	});
	if (taken?.key !== 'censor') return;
	channel.loq = loq;
	for (const s of zeros) s.set({ below: loq });
	ex.conversions.push(`${someOf(cellsOf(zeros), 8)}: typed 0 taken as below the LOQ of ${figure(loq)}.`);
}

/** B4: shares headed as percent whose largest is about 1 are fractions, as a formula gives them before they are formatted. */
import type { Channel } from './channels';
import type { Examination } from './examination';
import { ofKind, type Spot } from './spots';
import { figure } from './wording';

/** Where the largest of all shares lies when the charge is written as 1. */
const ABOUT_ONE = { low: 0.5, high: 1.2 };

/** Asked once for all columns of shares; their unit becomes that of the answer. */
export function askShareScale(ex: Examination, all: { channel: Channel; spots: Spot[] }[]): void {
	const shares = all.filter(({ channel }) => channel.unit === '% of charge' || channel.unit === 'mol %');
	const numbers = shares.flatMap(({ spots }) => ofKind(spots, 'number'));
	if (numbers.length < 3 || numbers.some((s) => s.reading.percent)) return;
	const top = numbers.reduce((a, b) => (b.reading.value > a.reading.value ? b : a));
	const most = top.reading.value;
	if (most < ABOUT_ONE.low || most > ABOUT_ONE.high) return;
	const unit = shares[0].channel.unit ?? '';
	const taken = ex.ask({
		rule: 'B4',
		level: 'ask',
		cells: [top.cell],
		key: 'share-scale',
		found: `no share above ${figure(most)} in ${unit}`,
		expected: 'shares up to about 100 %',
		message: `No share is above ${figure(most)} (${top.cell}), and the header says ${unit}. Fractions, of which 1 is the whole charge, or percent?`,
		options: [
			{ key: 'fraction', label: `Fractions: ${figure(most)} is ${figure(most * 100)} %` },
			{ key: 'percent', label: `Percent, as headed: ${figure(most)} %` }
		]
	});
	if (taken?.key !== 'fraction') return;
	for (const { channel } of shares) {
		channel.unit = 'fraction of charge';
		if ('unit' in channel.mapping) channel.mapping.unit = 'fraction of charge';
	}
	ex.conversions.push(`Shares headed ${unit} read as fractions of the charge, as chosen.`);
}

/** Units in the cells: B5 for a unit behind the number, B21 for percentages beside plain numbers. */
import { type Channel, channelName } from './channels';
import type { Examination } from './examination';
import { figure, plural, someOf } from './wording';
import { convertUnit } from './limits';
import { askSpots, cellsOf, letter, type NumberSpot, ofKind, type Spot } from './spots';
import { isRelative } from './units';

export function askUnits(ex: Examination, channel: Channel, spots: Spot[]): void {
	// A format that writes the column's own unit says nothing new.
	for (const s of ofKind(spots, 'with unit'))
		if (s.reading.format && s.reading.unit.of === 'value' && s.reading.unit.unit === channel.unit)
			(s as Spot).reading = {
				kind: 'number',
				value: s.reading.value,
				percent: false,
				text: false,
				odd: false
			};
	const carried = ofKind(spots, 'with unit');
	const byUnit = new Map<string, typeof carried>();
	for (const s of carried) {
		const unit = s.reading.unit.of === 'value' ? s.reading.unit.unit : s.reading.unit.of;
		byUnit.set(unit, [...(byUnit.get(unit) ?? []), s]);
	}
	for (const [unit, same] of byUnit) {
		const text = same[0].reading.text;
		const own = unit === channel.unit;
		const factor = convertUnit(1, unit, channel.unit);
		const options = own
			? [{ key: 'accept', label: `Read as ${figure(same[0].reading.value)}` }]
			: factor !== null
				? [{ key: 'convert', label: `Convert to ${channel.unit}: ${figure(same[0].reading.value * factor)}` }]
				: [];
		const taken = askSpots(
			ex,
			same,
			{
				rule: 'B5',
				level: own || factor !== null ? 'ask' : 'stop',
				key: `${letter(channel, same)}-${unit}`,
				found: `"${text}"`,
				expected: `a number in ${channel.unit ?? 'the unit of the column'}`,
				message: own
					? `"${text}" carries its unit, the column's own. Read as ${figure(same[0].reading.value)}?`
					: `"${text}" is not in the column's unit (${channel.unit ?? 'none chosen yet'}).${factor !== null ? ' Convert it?' : ''}`
			},
			options
		);
		if (taken?.key !== 'accept' && taken?.key !== 'convert') continue;
		for (const s of same) {
			const value = Number((s.reading.value * (factor ?? 1)).toPrecision(15));
			(s as Spot).reading = { kind: 'number', value, percent: false, text: true, odd: false };
		}
		ex.conversions.push(
			`${someOf(cellsOf(same), 8)}: ${own ? "unit in the cell, the column's own" : `converted from ${unit} to ${channel.unit}`}.`
		);
	}
}

export function settlePercent(ex: Examination, channel: Channel, spots: Spot[]): void {
	const numbers = ofKind(spots, 'number').filter((s) => s.reading.value !== 0);
	const percent = numbers.filter((s) => s.reading.percent);
	const plain = numbers.filter((s) => !s.reading.percent);
	if (percent.length === 0) return;
	const relative = isRelative(channel.unit) || channel.unit === 'fraction of charge';
	if (!relative && channel.unit !== null) return stopPercent(ex, channel, percent);
	if (plain.length > 0) mixedPercent(ex, channel, percent, plain);
	// A fraction column shown in %: the stored number is the fraction.
	if (channel.unit === 'fraction of charge')
		for (const s of percent) s.reading.value = Number((s.reading.value / 100).toPrecision(15));
}

function stopPercent(ex: Examination, channel: Channel, percent: Spot[]): void {
	askSpots(ex, percent, {
		rule: 'B21',
		level: 'stop',
		key: `${letter(channel, percent)}-percent`,
		found: `percentages in a column in ${channel.unit}`,
		expected: `numbers in ${channel.unit}`,
		message: `${someOf(cellsOf(percent))} ${percent.length === 1 ? 'is a percentage' : 'are percentages'} in a column in ${channel.unit}. Correct the column's unit, or leave ${percent.length === 1 ? 'it' : 'them'} as missing.`
	});
}

function mixedPercent(ex: Examination, channel: Channel, percent: NumberSpot[], plain: NumberSpot[]): void {
	const taken = ex.ask({
		rule: 'B21',
		level: 'stop',
		cells: cellsOf(plain.length <= percent.length ? plain : percent),
		key: `${letter(channel, plain)}-mixed`,
		found: `${plural(percent.length, 'percentage')} and ${plural(plain.length, 'plain number')}`,
		expected: 'one way of writing percent in the column',
		message: `${channelName(channel)} mixes percentages (${someOf(cellsOf(percent), 2)}) and plain numbers (${someOf(cellsOf(plain), 2)}). What are the plain ones, for example ${figure(plain[0].reading.value)}?`,
		options: [
			{ key: 'percent', label: `Already percent: ${figure(plain[0].reading.value)} %` },
			{ key: 'fraction', label: `Fractions: ${figure(plain[0].reading.value * 100)} %` }
		]
	});
	if (!taken) return;
	const fraction = channel.unit === 'fraction of charge';
	for (const s of plain) {
		if (taken.key === 'fraction' && !fraction)
			s.reading.value = Number((s.reading.value * 100).toPrecision(15));
		if (taken.key === 'percent' && fraction)
			s.reading.value = Number((s.reading.value / 100).toPrecision(15));
	}
	ex.conversions.push(
		`${someOf(cellsOf(plain), 8)}: plain numbers among percentages read as ${taken.key === 'percent' ? 'percent' : 'fractions'}.`
	);
}

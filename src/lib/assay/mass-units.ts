/** Mass concentrations and % w/w (B4): the molar mass and the density that turn them into mol/L. */
import type { ChannelContent } from '$lib/schemas/run';
import type { ValueUnit } from '$lib/schemas/sheet';
import { type Channel, channelKey, channelName, headerCell, nameOf } from './channels';
import { type Examination, positive } from './examination';
import { figure } from './wording';
import type { Content } from './scaling';
import { MASS_FACTOR } from './units';

export function massChannel(
	ex: Examination,
	channel: Channel,
	unit: ValueUnit,
	content: Content
): ChannelContent | null {
	const mass = molarMass(ex, channel);
	const density = unit === '% w/w' ? settleDensity(ex, channel) : 0;
	if (mass === null || density === null) return null;
	if (unit === '% w/w') {
		ex.conversions.push(
			`${channelName(channel)}: % w/w times density ${figure(density)} g/L over molar mass ${figure(mass)} g/mol to mol/L.`
		);
		return content('mol/L', density / 100 / mass);
	}
	ex.conversions.push(`${channelName(channel)}: ${unit} over molar mass ${figure(mass)} g/mol to mol/L.`);
	return content('mol/L', 1 / (MASS_FACTOR[unit] ?? 1) / mass);
}

function molarMass(ex: Examination, channel: Channel): number | null {
	const ids = Object.keys(channel.weights);
	const known = ids.map((id) => ex.species.find((s) => s.id === id)?.molarMassGPerMol);
	if (known.every((m) => m !== undefined && m === known[0])) return known[0] ?? null;
	const differ = known.every((m) => m !== undefined);
	const taken = ex.ask({
		rule: 'B4',
		level: 'ask',
		cells: [headerCell(ex, channel.column)],
		key: `molar-mass-${channelKey(channel)}`,
		found: `${channelName(channel)} in ${channel.unit}`,
		expected: differ ? 'one molar mass for the sum' : `the molar mass of ${nameOf(channel.weights)}`,
		message: differ
			? `${channelName(channel)} is in ${channel.unit}, and its species differ in molar mass. Which one was used?`
			: `${channelName(channel)} is in ${channel.unit}. What is the molar mass of ${nameOf(channel.weights)}?`,
		options: [
			{
				key: 'molar-mass',
				label: 'Molar mass …',
				needsValue: [{ key: 'value', label: 'Molar mass', kind: 'number', unit: 'g/mol' }]
			}
		]
	});
	return positive(ex, taken?.number(), 'The molar mass');
}

function settleDensity(ex: Examination, channel: Channel): number | null {
	if (ex.mapping.densityGPerL) return ex.mapping.densityGPerL;
	const taken = ex.ask({
		rule: 'B4',
		level: 'ask',
		cells: [headerCell(ex, channel.column)],
		key: 'density',
		found: 'values in % w/w',
		expected: 'the density of the solution',
		message: '% w/w needs the density of the solution to become a concentration. What is it?',
		options: [
			{
				key: 'density',
				label: 'Density …',
				needsValue: [{ key: 'value', label: 'Density', kind: 'number', unit: 'g/L' }]
			}
		]
	});
	const density = positive(ex, taken?.number(), 'The density');
	if (density !== null) ex.mapping.densityGPerL = density;
	return density;
}

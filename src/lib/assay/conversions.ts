/**
 * Values brought from the sheet's units to those of the run. Concentrations become mol/L; shares of the charge and area % keep
 * their numbers and their unit, because the fit compares them with the same share of what it predicts.
 *
 *     molar units      c = value / factor
 *     g/L              c = value / M
 *     % w/w            c = value/100 · ρ / M
 *     area %           kept; f_i, the relative response factor on a molar basis, goes with the channel
 *     area with IS     c = (a / a_IS) / f · c_IS
 *
 * Each conversion is put in words for the record; limits are converted as their values are.
 */
import type { ChannelContent } from '$lib/schemas/run';
import { areaChannel, settleAreaPercent } from './area-percent';
import { type Channel, channelName } from './channels';
import { coherent, SHARES } from './charge';
import type { Examination } from './examination';
import { massChannel } from './mass-units';
import { scale, tidy } from './scaling';
import { signalChannel } from './signals';
import type { Point } from './timepoints';
import { MOLAR_FACTOR } from './units';

export interface Converted {
	channels: ChannelContent[];
	/** True when every channel could be converted. */
	complete: boolean;
}

/** Converts the values of all points in place and gives the run's channels. */
export function convertValues(ex: Examination, channels: Channel[], points: Point[]): Converted {
	let complete = settleAreaPercent(ex, channels, points);
	const contents: ChannelContent[] = [];
	for (const channel of channels) {
		const outcome = convertChannel(ex, channel, points);
		if (!outcome) complete = false;
		else contents.push(outcome);
	}
	if (complete) complete = coherent(ex, contents);
	return { channels: contents, complete };
}

function convertChannel(ex: Examination, channel: Channel, points: Point[]): ChannelContent | null {
	const { unit } = channel;
	if (unit === null) return null;
	const content = (runUnit: string, factor: number): ChannelContent => {
		scale(points, channel.id, (v) => v * factor);
		const limit = (v: number | null) => (v === null ? undefined : tidy(v * factor));
		const [loq, lod] = [limit(channel.loq), limit(channel.lod)];
		return {
			id: channel.id,
			weights: channel.weights,
			unit: runUnit,
			...(loq ? { loq } : {}),
			...(lod ? { lod } : {}),
			...(channel.label !== channel.id ? { label: channel.label.slice(0, 80) } : {})
		};
	};
	const molar = MOLAR_FACTOR[unit];
	if (molar !== undefined) {
		if (molar !== 1) ex.conversions.push(`${channelName(channel)}: ${unit} divided by ${molar} to mol/L.`);
		return content('mol/L', 1 / molar);
	}
	if (SHARES.includes(unit)) return content(unit, 1);
	if (unit === 'area %') return areaChannel(channel, content);
	if (unit === 'area') return signalChannel(ex, channel, points, content);
	return massChannel(ex, channel, unit, content);
}

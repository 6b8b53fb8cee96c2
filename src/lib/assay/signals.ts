/** Signals in arbitrary units (B4): by a response factor, by an internal standard, or left to the fit. */
import type { ChannelContent } from '$lib/schemas/run';
import { type Channel, channelKey, channelName, headerCell } from './channels';
import { molarName } from './charge';
import { type Examination, positive } from './examination';
import { figure, someOf } from './wording';
import { convertUnit } from './limits';
import { type Content, mapValue, tidy } from './scaling';
import type { Point } from './timepoints';

export function signalChannel(
	ex: Examination,
	channel: Channel,
	points: Point[],
	content: Content
): ChannelContent | null {
	const standard = ex.mapping.columns.find((c) => c.role === 'internal standard');
	if (standard) return standardChannel(ex, channel, standard.column, points, content);
	if (channel.fitResponse) return fitted(ex, channel, content);
	if (channel.responseFactor !== null) return divided(ex, channel, channel.responseFactor, content);
	// While it is open which quantity counts, a signal may not be used at all.
	if (ex.findings.some((f) => f.rule === 'B3' && f.open)) return null;
	const taken = ex.ask({
		rule: 'B4',
		level: 'ask',
		cells: [headerCell(ex, channel.column)],
		key: `response-${channelKey(channel)}`,
		found: `${channelName(channel)}: a signal without calibration`,
		expected: 'its response factor, or the wish to let the fit find it',
		message: `${channelName(channel)} is a signal in arbitrary units. Is its response factor known, or shall the fit find it?`,
		options: [
			{ key: 'fit', label: 'Let the fit find the response factor' },
			{
				key: 'given',
				label: 'Signal per mol/L …',
				needsValue: [{ key: 'value', label: 'Signal per mol/L', kind: 'number' }]
			}
		]
	});
	if (!taken) return null;
	if (taken.key === 'fit') return fitted(ex, channel, content);
	const factor = positive(ex, taken.number(), 'The response factor');
	return factor === null ? null : divided(ex, channel, factor, content);
}

function fitted(ex: Examination, channel: Channel, content: Content): ChannelContent {
	ex.conversions.push(`${channelName(channel)}: signal as measured; its response factor is left to the fit.`);
	return { ...content('a.u.', 1), responseFactor: { fit: true } };
}

function divided(ex: Examination, channel: Channel, factor: number, content: Content): ChannelContent {
	ex.conversions.push(
		`${channelName(channel)}: signal divided by the response factor ${figure(factor)} per mol/L.`
	);
	return content('mol/L', 1 / factor);
}

function standardChannel(
	ex: Examination,
	channel: Channel,
	column: number,
	points: Point[],
	content: Content
): ChannelContent | null {
	const amount = ex.mapping.internalStandard;
	const known = amount ? convertUnit(amount.value, molarName(amount), 'mol/L') : null;
	const fields = [
		...(known === null
			? [
					{
						key: 'standard',
						label: 'Concentration of the internal standard',
						kind: 'number' as const,
						unit: 'mol/L'
					}
				]
			: []),
		...(channel.responseFactor === null
			? [
					{
						key: 'factor',
						label: `Response of ${channel.label} relative to the standard`,
						kind: 'number' as const
					}
				]
			: [])
	];
	let taken = null;
	if (fields.length > 0) {
		taken = ex.ask({
			rule: 'B4',
			level: 'ask',
			cells: [headerCell(ex, channel.column)],
			key: `standard-${channelKey(channel)}`,
			found: `${channelName(channel)}: a signal beside an internal standard`,
			expected: 'the concentration of the standard and the relative response',
			message: `${channelName(channel)} is to be counted against the internal standard. Give what is needed for it.`,
			options: [{ key: 'standard', label: 'Count against the standard …', needsValue: fields }]
		});
		if (!taken) return null;
	}
	const concentration = known ?? positive(ex, taken?.number('standard'), 'The concentration');
	const factor = channel.responseFactor ?? positive(ex, taken?.number('factor'), 'The relative response');
	if (concentration === null || factor === null) return null;
	const missing: string[] = [];
	for (const p of points) {
		const signal = ex.value(p.row, column);
		const v = p.values.get(channel.id);
		if (v === undefined) continue;
		if (signal.kind === 'number' && signal.value > 0)
			p.values.set(
				channel.id,
				mapValue(v, (x) => tidy(x / signal.value))
			);
		else {
			p.values.set(channel.id, null);
			missing.push(String(p.row));
		}
	}
	ex.conversions.push(
		`${channelName(channel)}: signal over that of the internal standard, divided by ${figure(factor)}, times ${figure(concentration)} mol/L${missing.length ? `; rows ${someOf(missing)} have no standard and are left as missing` : ''}.`
	);
	return content('mol/L', concentration / factor);
}

/** Rules about values at the limits of the method: below LOQ (B8), n.d. (B9), trace (B10), above the range (B12). */
import type { FindingOption, ValueField } from '$lib/schemas/sheet';
import { type Channel, channelKey } from './channels';
import { type Examination, positive } from './examination';
import { figure, plural, someOf } from './wording';
import { type LimitKind, type StatedLimits, suggestLimit } from './limits';
import { askSpots, cellsOf, leaveMissing, letter, ofKind, type Spot } from './spots';

function limitField(limits: StatedLimits, channel: Channel, kind: LimitKind): ValueField {
	const suggestion = suggestLimit(limits, channel, kind);
	return {
		key: kind,
		label: kind.toUpperCase(),
		kind: 'number',
		...(channel.unit ? { unit: channel.unit } : {}),
		...(suggestion ? { suggested: suggestion.value, source: suggestion.source } : {})
	};
}

/** B8: stated limits stand as they are; a bare "<LOQ" needs the limit. */
export function askLimits(ex: Examination, channel: Channel, spots: Spot[], limits: StatedLimits): void {
	const below = spots.filter((s) => s.reading.kind === 'below');
	const stated = below.filter((s) => s.reading.kind === 'below' && s.reading.limit !== null);
	for (const s of stated)
		if (s.reading.kind === 'below' && s.reading.limit !== null) s.set({ below: s.reading.limit });
	if (stated.length > 0)
		ex.conversions.push(`${someOf(cellsOf(stated), 8)}: kept as below the limit stated in the cell.`);
	for (const kind of ['loq', 'lod'] as const) {
		const bare = below.filter(
			(s) => s.reading.kind === 'below' && s.reading.limit === null && s.reading.which === kind
		);
		if (bare.length > 0) settleBare(ex, channel, bare, kind, limits);
	}
}

function settleBare(
	ex: Examination,
	channel: Channel,
	bare: Spot[],
	kind: LimitKind,
	limits: StatedLimits
): void {
	const name = kind.toUpperCase();
	let limit = channel[kind];
	if (limit === null) {
		const taken = ex.ask({
			rule: 'B8',
			level: 'ask',
			cells: cellsOf(bare),
			key: `${kind}-${channelKey(channel)}`,
			found: bare[0].reading.kind === 'below' ? `"${bare[0].reading.text}"` : '',
			expected: `the ${name} of ${channel.label}`,
			message: `What is the ${name} of ${channel.label}? Needed for ${plural(bare.length, 'value')}.`,
			options: [
				{ key: 'limit', label: `${name} is …`, needsValue: [limitField(limits, channel, kind)] },
				{ key: 'missing', label: 'Leave as missing' }
			]
		});
		if (!taken) return;
		if (taken.key === 'missing') return leaveMissing(ex, bare, `below ${name}, limit not stated`);
		limit = positive(ex, taken.number(kind), `The ${name}`);
		if (limit === null) return;
		channel[kind] = limit;
	}
	const value = limit;
	for (const s of bare) s.set({ below: value });
	ex.conversions.push(
		`${someOf(cellsOf(bare), 8)}: kept as below the ${name} of ${figure(value)} ${channel.unit ?? ''}.`.replace(
			' .',
			'.'
		)
	);
}

interface ChannelSpots {
	channel: Channel;
	spots: Spot[];
}

/** B9: "n.d." is not detected or not determined; asked once for the channels that share a unit and a stated limit. */
export function askNotDetected(ex: Examination, all: ChannelSpots[], limits: StatedLimits): void {
	const groups = new Map<string, ChannelSpots[]>();
	for (const { channel, spots } of all) {
		const own = spots.filter((s) => s.reading.kind === 'not');
		if (own.length === 0) continue;
		const key = `${channel.unit ?? ''}|${channel.lod ?? suggestLimit(limits, channel, 'lod')?.value ?? ''}`;
		groups.set(key, [...(groups.get(key) ?? []), { channel, spots: own }]);
	}
	for (const group of groups.values()) askNot(ex, group, limits);
}

function askNot(ex: Examination, group: ChannelSpots[], limits: StatedLimits): void {
	const spots = group.flatMap((g) => g.spots);
	const text = spots[0].reading.kind === 'not' ? spots[0].reading.text : '';
	const known = group.every((g) => g.channel.lod !== null);
	const first = group[0].channel;
	const detected: FindingOption = known
		? { key: 'not-detected', label: `Not detected, below ${figure(first.lod ?? 0)}` }
		: {
				key: 'not-detected',
				label: 'Not detected, below the LOD of …',
				needsValue: [limitField(limits, first, 'lod')]
			};
	const taken = ex.ask({
		rule: 'B9',
		level: 'ask',
		cells: cellsOf(spots),
		key: group
			.map((g) => g.spots[0].cell)
			.join('-')
			.slice(0, 80),
		found: `"${text}"`,
		expected: 'not detected (below the LOD) or not determined (missing)',
		message: `"${text}" in ${someOf(cellsOf(spots))}: not detected, or not determined?`,
		options: [detected, { key: 'not-determined', label: 'Not determined: leave as missing' }]
	});
	if (!taken) return;
	if (taken.key === 'not-determined') return leaveMissing(ex, spots, `"${text}", not determined`);
	const given = known ? null : positive(ex, taken.number('lod'), 'The LOD');
	if (!known && given === null) return;
	for (const { channel, spots: own } of group) {
		const lod = channel.lod ?? given ?? 0;
		channel.lod = lod;
		for (const s of own) s.set({ below: lod });
	}
	ex.conversions.push(
		`${someOf(cellsOf(spots), 8)}: "${text}" taken as not detected, below ${figure(given ?? first.lod ?? 0)} ${first.unit ?? ''}.`.replace(
			' .',
			'.'
		)
	);
}

/** B10: a trace lies between LOD and LOQ; the fit knows it as below the LOQ, the lower bound stays on the record. */
export function askTrace(ex: Examination, channel: Channel, spots: Spot[], limits: StatedLimits): void {
	const trace = spots.filter((s) => s.reading.kind === 'trace');
	if (trace.length === 0) return;
	const text = trace[0].reading.kind === 'trace' ? trace[0].reading.text : '';
	const fields = (['lod', 'loq'] as const)
		.filter((kind) => channel[kind] === null)
		.map((kind) => limitField(limits, channel, kind));
	const taken = ex.ask({
		rule: 'B10',
		level: 'ask',
		cells: cellsOf(trace),
		key: `trace-${channelKey(channel)}`,
		found: `"${text}"`,
		expected: 'a trace (between LOD and LOQ), missing, or a retention time',
		message: `"${text}" in ${someOf(cellsOf(trace))}: a trace between LOD and LOQ, or missing? (It may also stand for a retention time.)`,
		options: [
			{
				key: 'between',
				label:
					fields.length === 0
						? `Trace, between ${figure(channel.lod ?? 0)} and ${figure(channel.loq ?? 0)}`
						: 'Trace, between LOD and LOQ',
				...(fields.length > 0 ? { needsValue: fields } : {})
			},
			{ key: 'missing', label: 'Missing, or a retention time: leave as missing' }
		]
	});
	if (!taken) return;
	if (taken.key === 'missing') return leaveMissing(ex, trace, `"${text}"`);
	const lod = channel.lod ?? taken.number('lod');
	const loq = channel.loq ?? taken.number('loq');
	if (!(lod > 0 && loq > lod))
		return ex.reopen('The LOQ must be greater than the LOD, and both greater than zero.');
	channel.lod = lod;
	channel.loq = loq;
	for (const s of trace) s.set({ below: loq });
	ex.conversions.push(
		`${someOf(cellsOf(trace), 8)}: "${text}" taken as a trace between ${figure(lod)} and ${figure(loq)} ${channel.unit ?? ''}; kept as below ${figure(loq)}.`.replace(
			' ;',
			';'
		)
	);
}

export function askAbove(ex: Examination, channel: Channel, spots: Spot[]): void {
	const above = ofKind(spots, 'above');
	const byText = new Map<string, typeof above>();
	for (const s of above) byText.set(s.reading.text, [...(byText.get(s.reading.text) ?? []), s]);
	for (const [text, same] of byText) {
		const limit = same[0].reading.limit;
		const taken = askSpots(
			ex,
			same,
			{
				rule: 'B12',
				level: 'ask',
				key: `${letter(channel, same)}-${text}`.slice(0, 80),
				found: `"${text}"`,
				expected: 'a number, or the upper limit that it lies above',
				message: `"${text}" in ${someOf(cellsOf(same))}: above the upper limit${limit === null ? '' : ` of ${figure(limit)}`}, or missing?`
			},
			[
				limit === null
					? {
							key: 'above',
							label: 'Above the limit of …',
							needsValue: [
								{ key: 'value', label: 'Upper limit', kind: 'number', unit: channel.unit ?? undefined }
							]
						}
					: { key: 'above', label: `Above ${figure(limit)}` }
			]
		);
		if (taken?.key !== 'above') continue;
		const value = limit ?? taken.number();
		for (const s of same) s.set({ above: value });
		ex.conversions.push(`${someOf(cellsOf(same), 8)}: "${text}" kept as above ${figure(value)}.`);
	}
}

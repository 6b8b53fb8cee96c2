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
import type { AssayValue, ChannelContent } from '$lib/schemas/run';
import type { FindingOption, ValueUnit } from '$lib/schemas/sheet';
import { isFitted, type Quantity } from '$lib/schemas/quantity';
import { channelKey, channelName, headerCell, nameOf, type Channel } from './channels';
import { figure, someOf, type Examination } from './examination';
import { convertUnit } from './limits';
import type { Point } from './timepoints';
import { MASS_FACTOR, MOLAR_FACTOR } from './units';

export interface Converted {
	channels: ChannelContent[];
	/** True when every channel could be converted. */
	complete: boolean;
}

const SHARES: ValueUnit[] = ['% of charge', 'mol %', 'fraction of charge'];

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

type Content = (unit: string, factor: number) => ChannelContent;

/** Fifteen digits: what a sheet holds; removes the dust of binary factors. */
const tidy = (value: number) => Number(value.toPrecision(15));

function scale(points: Point[], id: string, f: (v: number) => number): void {
	for (const p of points) {
		const v = p.values.get(id);
		if (v !== undefined)
			p.values.set(
				id,
				mapValue(v, (x) => tidy(f(x)))
			);
	}
}

export function mapValue(v: AssayValue, f: (x: number) => number): AssayValue {
	if (v === null) return null;
	if (typeof v === 'number') return f(v);
	return 'below' in v ? { below: f(v.below) } : { above: f(v.above) };
}

/* ---------------------------------------------------------------- mass concentrations */

function massChannel(
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

function positive(ex: Examination, value: number | undefined, what: string): number | null {
	if (value === undefined) return null;
	if (value > 0) return value;
	ex.reopen(`${what} must be greater than zero.`);
	return null;
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

/* ---------------------------------------------------------------- shares of the charge */

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

const molarName = (q: Quantity) =>
	q.unit === 'M' ? 'mol/L' : q.unit === 'mM' ? 'mmol/L' : q.unit.replace('µ', 'u');

/** Amounts and values must be comparable: concentrations with a molar charge, shares with a charge that they can refer to. */
function coherent(ex: Examination, contents: ChannelContent[]): boolean {
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

/* ---------------------------------------------------------------- area %, B22 and B23 */

function settleAreaPercent(ex: Examination, channels: Channel[], points: Point[]): boolean {
	const area = channels.filter((c) => c.unit === 'area %');
	if (area.length === 0) return true;
	// While it is open what the columns are, nothing more is asked about them together.
	if (ex.findings.some((f) => (f.rule === 'B3' || f.rule === 'B32') && f.open)) return false;
	const sums = points.map((p) => rowSum(p, area)).filter((s) => s !== null);
	const full = sums.length > 0 && sums.filter((s) => Math.abs(s - 100) <= 0.5).length >= sums.length * 0.8;
	const given = area.filter((c) => c.responseFactor !== null);
	if (given.length === area.length) return useFactors(ex, area, (c) => c.responseFactor ?? 1);
	const taken = ex.ask({
		rule: full ? 'B22' : 'B23',
		level: 'ask',
		cells: area.map((c) => headerCell(ex, c.column)),
		key: 'area-percent',
		found: full ? 'area % that sum to 100 in each row' : `area % that sum to ${sumsText(sums)}`,
		expected: 'relative response factors, or the wish to fit area % as they are',
		message: full
			? 'These are area %: each row sums to 100, so they say nothing about the mass balance and are biased by response factors. Correct them with relative response factors?'
			: `These are area %, but the rows sum to ${sumsText(sums)}. Were peaks left out, or is a solvent counted? Correct with relative response factors, or use them as they are?`,
		options: areaOptions(area, full)
	});
	if (!taken) return false;
	if (taken.key === 'rrf') return useFactors(ex, area, (c) => taken.number(c.id));
	if (taken.key === 'scale') scaleRows(ex, area, points);
	else
		ex.conversions.push(
			'Area % used as received, without response factors; they say nothing about the mass balance.'
		);
	return true;
}

function areaOptions(area: Channel[], full: boolean): FindingOption[] {
	const fields = area.map((c, i) => ({
		key: c.id,
		label: `RRF of ${c.label}`,
		kind: 'number' as const,
		...(c.responseFactor !== null
			? { suggested: c.responseFactor, source: 'column' }
			: i === 0
				? { suggested: 1, source: 'reference species' }
				: {})
	}));
	const options: FindingOption[] = [
		{ key: 'rrf', label: 'Correct with relative response factors (molar basis) …', needsValue: fields },
		{ key: 'uncorrected', label: 'Use area % as they are, labelled so' }
	];
	if (!full) options.push({ key: 'scale', label: 'Scale each row to 100 %' });
	return options;
}

function sumsText(sums: number[]): string {
	if (sums.length === 0) return 'nothing that can be told';
	const [low, high] = [Math.min(...sums), Math.max(...sums)];
	return high - low < 0.05 ? figure(Number(low.toFixed(1))) : `${low.toFixed(1)} to ${high.toFixed(1)}`;
}

/** Sum of a row's values, limits counted as nothing; null when a value is missing. */
function rowSum(p: Point, channels: Channel[]): number | null {
	let sum = 0;
	for (const c of channels) {
		const v = p.values.get(c.id);
		if (v === undefined || v === null) return null;
		if (typeof v === 'number') sum += v;
	}
	return sum;
}

/** The areas stay as received; the fit weighs each species with its factor. */
function useFactors(ex: Examination, area: Channel[], factor: (c: Channel) => number): boolean {
	if (area.some((c) => !(factor(c) > 0))) {
		ex.reopen('A response factor must be greater than zero.');
		return false;
	}
	for (const c of area) c.responseFactor = factor(c);
	const list = area.map((c) => `${c.label} ${figure(factor(c))}`).join(', ');
	ex.conversions.push(
		`Area % kept as received; relative response factors on a molar basis go with them: ${list}.`
	);
	return true;
}

function areaChannel(channel: Channel, content: Content): ChannelContent {
	const factor = channel.responseFactor;
	const response = factor !== null && factor !== 1 ? { responseFactor: { value: factor, unit: '1' } } : {};
	return { ...content('area %', 1), ...response };
}

/** Each row divided by its sum, limits counted as nothing; a row with a missing peak cannot be scaled. */
function scaleRows(ex: Examination, area: Channel[], points: Point[]): void {
	const gaps: string[] = [];
	for (const p of points) {
		const sum = rowSum(p, area);
		if (sum === null || !(sum > 0)) {
			if (area.some((c) => p.values.get(c.id) != null)) gaps.push(String(p.row));
			for (const c of area) if (p.values.has(c.id)) p.values.set(c.id, null);
			continue;
		}
		for (const c of area) {
			const v = p.values.get(c.id);
			if (v !== undefined)
				p.values.set(
					c.id,
					mapValue(v, (x) => tidy((x / sum) * 100))
				);
		}
	}
	ex.conversions.push('Area %: each row scaled to 100 %.');
	if (gaps.length > 0)
		ex.conversions.push(
			`Rows ${someOf(gaps)}: a peak is missing, so the row could not be scaled and is left as missing.`
		);
}

/* ---------------------------------------------------------------- signals */

function signalChannel(
	ex: Examination,
	channel: Channel,
	points: Point[],
	content: Content
): ChannelContent | null {
	const standard = ex.mapping.columns.find((c) => c.role === 'internal standard');
	if (standard) return standardChannel(ex, channel, standard.column, points, content);
	if (channel.fitResponse) return fitted(ex, channel, content);
	if (channel.responseFactor !== null) return divided(ex, channel, channel.responseFactor, content);
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

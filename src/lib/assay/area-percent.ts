/** B22 and B23: area % are recognised by their row sums, corrected with response factors, scaled, or used as they are. */
import type { ChannelContent } from '$lib/schemas/run';
import type { FindingOption } from '$lib/schemas/sheet';
import { type Channel, headerCell } from './channels';
import type { Examination } from './examination';
import { figure, someOf } from './wording';
import { type Content, mapValue, tidy } from './scaling';
import type { Point } from './timepoints';

export function settleAreaPercent(ex: Examination, channels: Channel[], points: Point[]): boolean {
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

export function areaChannel(channel: Channel, content: Content): ChannelContent {
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

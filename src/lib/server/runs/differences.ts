import type { AssayValue, RunContent } from '$lib/schemas/run';
import { contentHash } from '../audit/canonical';

export interface Difference {
	/** What differs, in words: "temperature", "B at 0.5 h". */
	field: string;
	from: unknown;
	to: unknown;
}

const same = (a: unknown, b: unknown): boolean => contentHash(a ?? null) === contentHash(b ?? null);

const CONDITIONS: [keyof RunContent, string][] = [
	['temperature', 'temperature'],
	['temperatureLog', 'temperature log'],
	['useTemperatureLog', 'temperature log as the program in fits'],
	['initial', 'charge'],
	['excess', 'excess'],
	['timeUnit', 'time unit'],
	['timeOffset', 'time offset'],
	['timeZero', 'what counts as time zero'],
	['replicates', 'meaning of equal times'],
	['channels', 'assay columns']
];

function conditionsDiffer(before: RunContent, after: RunContent): Difference[] {
	return CONDITIONS.flatMap(([key, field]) =>
		same(before[key], after[key]) ? [] : [{ field, from: before[key] ?? null, to: after[key] ?? null }]
	);
}

/** Rows are told apart by time and by which of several rows at that time they are. */
function rowsByTime(content: RunContent): Map<string, Record<string, AssayValue>> {
	const seen = new Map<number, number>();
	return new Map(
		content.timepoints.map((point) => {
			const nth = (seen.get(point.time) ?? 0) + 1;
			seen.set(point.time, nth);
			const row = nth === 1 ? '' : ` (row ${nth} of that time)`;
			return [`${point.time} ${content.timeUnit}${row}`, point.values];
		})
	);
}

function valuesDiffer(before: RunContent, after: RunContent): Difference[] {
	const old = rowsByTime(before);
	const now = rowsByTime(after);
	const names = new Map([...before.channels, ...after.channels].map((c) => [c.id, c.label ?? c.id]));
	const differences: Difference[] = [];
	for (const row of new Set([...old.keys(), ...now.keys()])) {
		const a = old.get(row);
		const b = now.get(row);
		if (!a || !b) {
			differences.push({ field: `row at ${row}`, from: a ?? null, to: b ?? null });
			continue;
		}
		for (const channel of new Set([...Object.keys(a), ...Object.keys(b)]))
			if (!same(a[channel], b[channel]))
				differences.push({
					field: `${names.get(channel) ?? channel} at ${row}`,
					from: a[channel] ?? null,
					to: b[channel] ?? null
				});
	}
	return differences;
}

const exclusionKey = (e: { index: number; channel: string | null }): string =>
	`${e.index} ${e.channel ?? ''}`;

function exclusionsDiffer(before: RunContent, after: RunContent): Difference[] {
	const old = new Map((before.exclusions ?? []).map((e) => [exclusionKey(e), e]));
	const now = new Map((after.exclusions ?? []).map((e) => [exclusionKey(e), e]));
	const place = (content: RunContent, e: { index: number; channel: string | null }): string => {
		const point = content.timepoints[e.index];
		const channel = content.channels.find((c) => c.id === e.channel);
		const what = e.channel === null ? 'whole row' : (channel?.label ?? e.channel);
		return `${what} at ${point ? `${point.time} ${content.timeUnit}` : `row ${e.index + 1}`}`;
	};
	const added = [...now].filter(([key]) => !old.has(key));
	const gone = [...old].filter(([key]) => !now.has(key));
	return [
		...added.map(([, e]) => ({
			field: place(after, e),
			from: 'used',
			to: `excluded: ${e.reasonCode}, ${e.reason}`
		})),
		...gone.map(([, e]) => ({ field: place(before, e), from: `excluded: ${e.reasonCode}`, to: 'used' }))
	];
}

/** What one revision of a run has other than another: conditions, values, exclusions. */
export function runDifferences(before: RunContent, after: RunContent): Difference[] {
	return [
		...conditionsDiffer(before, after),
		...valuesDiffer(before, after),
		...exclusionsDiffer(before, after)
	];
}

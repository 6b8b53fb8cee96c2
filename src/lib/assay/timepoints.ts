/** Rules about equal times (B13, B19), and the timepoints that result. */
import type { AssayValue } from '$lib/schemas/run';
import type { TimeUnit } from '$lib/schemas/sheet';
import type { Channel } from './channels';
import type { Examination } from './examination';
import { figure, plural, someOf } from './wording';
import type { Sample, Timed } from './samples';
import { secondsIn } from './times';
import type { Values } from './value-rules';

export interface Point {
	row: number;
	/** In the run's unit; null while open. */
	time: number | null;
	sampleId?: string;
	values: Map<string, AssayValue>;
	/** A channel whose cell is not settled yet. */
	unsettled: boolean;
	cells: Map<string, string>;
	sample: Sample;
}

export function pointsOf(
	ex: Examination,
	timed: Timed[],
	unit: TimeUnit,
	channels: Channel[],
	values: Values
): Point[] {
	return timed.map(({ sample, seconds, plain }) => {
		const own = values.get(sample) ?? new Map<string, AssayValue>();
		const cells = new Map<string, string>();
		for (const [id, place] of sample.cells) cells.set(id, ex.at(place.row, place.column));
		return {
			row: sample.row,
			time: seconds === null ? null : (plain ?? secondsIn(seconds, unit)),
			...(sample.sampleId ? { sampleId: sample.sampleId } : {}),
			values: own,
			unsettled: channels.some((c) => sample.cells.has(c.id) && !own.has(c.id)),
			cells,
			sample
		};
	});
}

/** Settles equal times: injections become one value each, samples stay apart. */
export function settleReplicates(ex: Examination, points: Point[], unit: TimeUnit): Point[] {
	// Replicate columns are equal times by themselves: rows are compared with rows.
	const groups = new Map<string, Point[]>();
	let part = 0;
	for (const p of points) {
		// A row whose time is open may begin another run: what lies on its two sides is not compared.
		if (p.time === null) part++;
		const key = `${part} ${p.sample.replicate} ${p.time}`;
		if (p.time !== null) groups.set(key, [...(groups.get(key) ?? []), p]);
	}
	const repeated = [...groups.values()].filter((g) => g.length > 1);
	if (repeated.length === 0) return sorted(points);
	const rows = repeated.filter((g) => g[0].sample.replicate === 0);
	const kind = ex.mapping.replicates ?? byIdentity(rows) ?? askReplicates(ex, rows, unit);
	if (kind) ex.mapping.replicates = kind;
	if (kind !== 'injections') return sorted(points);
	const merged = new Map<Point, Point>();
	const dropped = new Set<Point>();
	for (const group of repeated) {
		for (const same of bySample(group)) {
			if (same.length < 2) continue;
			merged.set(same[0], average(ex, same));
			same.slice(1).forEach((p) => dropped.add(p));
		}
	}
	return sorted(points.filter((p) => !dropped.has(p)).map((p) => merged.get(p) ?? p));
}

/** By time; the order of the sheet where times are equal. A point without a time stays where it is. */
function sorted(points: Point[]): Point[] {
	if (points.some((p) => p.time === null)) return points;
	return points
		.map((p, i) => ({ p, i }))
		.sort((a, b) => (a.p.time ?? 0) - (b.p.time ?? 0) || a.i - b.i)
		.map(({ p }) => p);
}

function bySample(group: Point[]): Point[][] {
	const samples = new Map<string, Point[]>();
	for (const p of group) samples.set(p.sampleId ?? '', [...(samples.get(p.sampleId ?? '') ?? []), p]);
	return [...samples.values()];
}

/** Sample names decide where every repeated row has one: all different are samples; an injection column with equal names are injections. */
function byIdentity(repeated: Point[][]): 'samples' | 'injections' | null {
	if (!repeated.every((g) => g.every((p) => p.sampleId))) return null;
	if (repeated.every((g) => new Set(g.map((p) => p.sampleId)).size === g.length)) return 'samples';
	return repeated.every((g) => g.every((p) => p.sample.injection)) ? 'injections' : null;
}

function askReplicates(
	ex: Examination,
	repeated: Point[][],
	unit: TimeUnit
): 'samples' | 'injections' | null {
	const group = repeated[0];
	const named = group.every((p) => p.sampleId);
	const shown =
		ex.shown(group[0].sample.time.row, group[0].sample.time.column) ||
		`${figure(group[0].time ?? 0)} ${unit}`;
	const rows = group.map((p) => String(p.row));
	const count = ['', '', 'Two', 'Three', 'Four', 'Five'][group.length] ?? String(group.length);
	const more = repeated.length > 1 ? ` (and at ${plural(repeated.length - 1, 'other time')})` : '';
	const taken = ex.ask({
		rule: named ? 'B13' : 'B19',
		level: 'ask',
		cells: repeated.flatMap((g) => g.map((p) => ex.at(p.sample.time.row, p.sample.time.column))),
		key: 'replicates',
		found: `${plural(group.length, 'row')} at ${shown}: rows ${someOf(rows)}${more}`,
		expected: 'injections of one sample, or separate samples',
		message: `${count} rows at ${shown}${more}: injections of one sample, or ${group.length === 2 ? 'two' : 'several'} samples?`,
		options: [
			{ key: 'injections', label: 'Injections of one sample: average them' },
			{ key: 'samples', label: 'Separate samples: keep each row' }
		]
	});
	return (taken?.key as 'samples' | 'injections' | undefined) ?? null;
}

/** One value for the injections of one sample; the spread goes on the record as injection precision. */
function average(ex: Examination, same: Point[]): Point {
	const values = new Map<string, AssayValue>();
	const spreads: string[] = [];
	for (const id of same[0].cells.keys()) {
		const own = same.map((p) => p.values.get(id)).filter((v) => v !== undefined);
		if (own.length < same.length) continue;
		const { value, spread } = averageOf(own);
		values.set(id, value);
		if (spread !== null) spreads.push(`${id} ±${figure(spread)}`);
	}
	ex.conversions.push(
		`Rows ${someOf(same.map((p) => String(p.row)))}: injections of one sample, averaged${spreads.length ? ` (spread ${spreads.join(', ')})` : ''}.`
	);
	return { ...same[0], values, unsettled: same.some((p) => p.unsettled) };
}

/** Mean of the numbers; limits among them make the outcome a limit, the widest that holds for all. */
export function averageOf(values: AssayValue[]): { value: AssayValue; spread: number | null } {
	const numbers = values.filter((v) => typeof v === 'number');
	const below = values.filter((v) => v !== null && typeof v === 'object' && 'below' in v);
	const above = values.filter((v) => v !== null && typeof v === 'object' && 'above' in v);
	if (above.length > 0 && below.length === 0)
		return { value: { above: Math.min(...above.map((v) => v.above), ...numbers) }, spread: null };
	if (below.length > 0 && above.length === 0)
		return { value: { below: Math.max(...below.map((v) => v.below), ...numbers) }, spread: null };
	if (numbers.length === 0 || above.length > 0) return { value: null, spread: null };
	const mean = numbers.reduce((a, b) => a + b, 0) / numbers.length;
	const squares = numbers.reduce((sum, v) => sum + (v - mean) ** 2, 0);
	return { value: mean, spread: numbers.length > 1 ? Math.sqrt(squares / (numbers.length - 1)) : null };
}

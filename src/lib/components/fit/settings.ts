/** The parameter table of a new fit: rows from the plan and from what the person said, and the settings that go with the form. */
import type { ParameterSetting, ParameterSettings } from '$lib/schemas/fit-form';
import type { Quantity } from '$lib/schemas/quantity';

export interface PlannedRow {
	id: string;
	kind: string;
	state: 'fitted' | 'fixed' | 'tied';
	start: Quantity | null;
	tiedTo: string | null;
	factor: number | null;
	unit: string;
	/** The shared id that it stands in for, where each run has its own. */
	localOf?: string | null;
	/** Whether each run can have a value of its own. */
	mayBeLocal?: boolean;
}

export interface ParameterRow {
	id: string;
	kind: string;
	unit: string;
	state: ParameterSetting['state'];
	value: number | null;
	lower: number | null;
	upper: number | null;
	to: string | null;
	factor: number | null;
	/** The person said something of it. */
	own: boolean;
	localOf: string | null;
	/** Id under which it is chosen whether each run has its own; null where that is no choice, or stands at an earlier row. */
	scope: string | null;
}

export function rowOf(planned: PlannedRow, settings: ParameterSettings): ParameterRow {
	const own = settings[planned.id];
	return {
		id: planned.id,
		kind: planned.kind,
		unit: own?.value?.unit ?? planned.unit,
		state: own?.state ?? planned.state,
		value: own?.value?.value ?? planned.start?.value ?? null,
		lower: own?.lower?.value ?? null,
		upper: own?.upper?.value ?? null,
		to: own?.to ?? planned.tiedTo,
		factor: own?.factor ?? planned.factor,
		own: own !== undefined,
		localOf: planned.localOf ?? null,
		scope: planned.mayBeLocal ? (planned.localOf ?? planned.id) : null
	};
}

/** Rows of the table; of constants that each run has for itself the first carries the choice for all. */
export function rowsOf(planned: PlannedRow[], settings: ParameterSettings): ParameterRow[] {
	const offered = new Set<string>();
	return planned.map((p) => {
		const row = rowOf(p, settings);
		if (row.scope === null || !offered.has(row.scope)) {
			if (row.scope) offered.add(row.scope);
			return row;
		}
		return { ...row, scope: null };
	});
}

/** What was said of a shared parameter no longer holds when each run has its own, and the other way round. */
export function settingsWithout(
	settings: ParameterSettings,
	rows: readonly ParameterRow[],
	shared: string
): ParameterSettings {
	const gone = new Set([shared, ...rows.filter((r) => r.localOf === shared).map((r) => r.id)]);
	const opened = settings[shared]?.state === 'fitted' && /\.responseFactor$/.test(shared);
	return Object.fromEntries(
		Object.entries(settings).flatMap(([id, setting]) =>
			!gone.has(id)
				? [[id, setting]]
				: // A response factor stays opened; only its bounds fall away.
					id === shared && opened
					? [[id, { state: 'fitted' as const, ...(setting.value ? { value: setting.value } : {}) }]]
					: []
		)
	);
}

/** Settings after one change to a row; quantities carry the row's unit. */
export function changed(
	settings: ParameterSettings,
	row: ParameterRow,
	change: Partial<Pick<ParameterRow, 'state' | 'value' | 'lower' | 'upper' | 'to' | 'factor'>>
): ParameterSettings {
	const next = { ...row, ...change };
	const quantity = (value: number | null): Quantity | undefined =>
		value === null ? undefined : { value, unit: row.unit };
	const [value, lower, upper] = [next.value, next.lower, next.upper].map(quantity);
	return {
		...settings,
		[row.id]: {
			state: next.state,
			...(value ? { value } : {}),
			...(next.state === 'fitted' && lower ? { lower } : {}),
			...(next.state === 'fitted' && upper ? { upper } : {}),
			...(next.state === 'tied' && next.to ? { to: next.to, factor: next.factor ?? 1 } : {})
		}
	};
}

export function without(settings: ParameterSettings, id: string): ParameterSettings {
	return Object.fromEntries(Object.entries(settings).filter(([key]) => key !== id));
}

/** Parameters that this one can be tied to: others of its kind that are not tied themselves. */
export const tieTargets = (row: ParameterRow, rows: ParameterRow[]): string[] =>
	rows.filter((r) => r.id !== row.id && r.kind === row.kind && r.state !== 'tied').map((r) => r.id);

/** The forward constant of the same step, for k reverse = k forward / K; null for anything but a reverse constant. */
export function forwardOf(id: string): string | null {
	const match = /^(.+)\.reverse\.kRef$/.exec(id);
	return match ? `${match[1]}.forward.kRef` : null;
}

/** What is missing or wrong before the plan can be asked for, in words; null when nothing is. */
export function problemOf(row: ParameterRow): string | null {
	if (row.state === 'tied' && !row.to) return 'Choose what it is tied to.';
	if (row.state === 'fixed' && row.value === null) return 'Give the value that it is held at.';
	if (row.lower !== null && row.upper !== null && row.lower >= row.upper)
		return 'The lower bound must lie below the upper one.';
	return null;
}

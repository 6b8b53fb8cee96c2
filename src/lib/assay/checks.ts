/** What the table as a whole must offer: amounts at time zero (B33), enough points (B34). */
import type { FindingOption } from '$lib/schemas/sheet';
import type { Channel } from './channels';
import type { Examination } from './examination';
import { figure, plural } from './wording';
import type { Point } from './timepoints';

/** B33: without a row at time zero the charge has to come from somewhere. */
export function askCharge(ex: Examination, points: Point[], channels: Channel[]): void {
	const times = points.map((p) => p.time).filter((t) => t !== null);
	const given = Object.keys(ex.mapping.conditions?.initial ?? {}).length > 0;
	if (given || times.length === 0 || Math.min(...times) <= 0) return;
	const species = [
		...new Set([...ex.species.map((s) => s.id), ...channels.flatMap((c) => Object.keys(c.weights))])
	];
	const starting = ex.species.find((s) => s.role === 'starting material')?.id ?? species[0];
	const choices = species.map((id) => ({ key: id, label: id }));
	const what = {
		key: 'species',
		label: 'Charged species',
		kind: 'choice' as const,
		choices,
		...(starting ? { suggested: starting, source: 'scheme' } : {})
	};
	const options: FindingOption[] = [
		{
			key: 'charge',
			label: 'Fix it from the charge …',
			needsValue: [
				what,
				{ key: 'value', label: 'Amount charged', kind: 'number' },
				{
					key: 'unit',
					label: 'Unit',
					kind: 'choice',
					choices: ['mol/L', 'mmol/L', '%'].map((key) => ({ key, label: key }))
				}
			]
		},
		{ key: 'fit', label: 'Let the fit find it', needsValue: [what] }
	];
	const taken = ex.ask({
		rule: 'B33',
		level: 'ask',
		cells: [ex.at(ex.mapping.block.firstRow, ex.mapping.block.firstColumn)],
		key: 'charge',
		found: `the first sample at ${figure(Math.min(...times))}, none at time zero`,
		expected: 'the amounts at time zero',
		message: 'No sample was taken at time zero. Fix the amounts from the charge, or let the fit find them?',
		options
	});
	if (!taken) return;
	const conditions = (ex.mapping.conditions ??= { temperature: null, initial: {}, excess: {} });
	conditions.initial[taken.text('species')] =
		taken.key === 'charge' ? { value: taken.number(), unit: taken.text('unit') } : { fit: true };
}

/** B34: too few points. `parameters` is how many constants the fit is to find, where that is known. */
export function checkCount(
	ex: Examination,
	points: Point[],
	channels: Channel[],
	parameters: number | null
): void {
	const times = new Set(points.map((p) => p.time).filter((t) => t !== null)).size;
	const values = points.reduce((n, p) => n + channels.filter((c) => p.values.get(c.id) != null).length, 0);
	const cells = [ex.at(ex.mapping.block.firstRow, ex.mapping.block.firstColumn)];
	if (parameters !== null && values < parameters)
		ex.ask({
			rule: 'B34',
			level: 'stop',
			cells,
			key: 'parameters',
			found: plural(values, 'value'),
			expected: `at least ${parameters}, one for each constant`,
			message: `The table gives ${plural(values, 'value')} for ${plural(parameters, 'constant')}. Fit it together with other runs, or choose a table with more rows.`,
			options: [{ key: 'together', label: 'It will be fitted together with other runs' }]
		});
	if (times > 0 && times < 5 && points.every((p) => p.time !== null))
		ex.note({
			rule: 'B34',
			cells,
			key: 'few',
			found: plural(times, 'time'),
			expected: 'at least 5 times',
			message: `Only ${plural(times, 'time')}: the constants will have wide intervals, and lack of fit can hardly be seen.`
		});
}

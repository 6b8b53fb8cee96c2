/** What a window rests on, and what limits it, in plain words. */
import type { FirstFormResult } from '../../schemas/window';
import { NATURAL_SCALE_LIMIT } from './draws';
import type { FittedNetwork } from './parameters';
import type { Propagated } from './propagate';
import type { FitBasis } from './types';

type Note = FirstFormResult['notes'][number];

export function notesOf(
	fitted: FittedNetwork,
	propagated: Propagated,
	fit: FitBasis,
	outsideStudied: boolean
): Note[] {
	const notes: Note[] = [];
	const add = (level: Note['level'], code: string, message: string) => notes.push({ level, code, message });
	if (outsideStudied) {
		const [low, high] = fit.studied.temperatureC;
		add(
			'caution',
			'outside-studied-range',
			`Outside the studied range of ${low} to ${high} °C: the mechanism may differ there, and the interval does not cover that. Not for a recipe without a justification.`
		);
	}
	if (fitted.undetermined.length > 0)
		add(
			'caution',
			'not-determined',
			`${fitted.undetermined.join(', ')}: not determined by these data, so no interval can be given. Add the samples that the fit's findings name.`
		);
	else if (fitted.varied.length === 0)
		add('caution', 'nothing-varied', 'No constant was fitted, so these figures have no interval.');
	else if (propagated.rows.length === 0)
		add(
			'caution',
			'covariance-unusable',
			'The covariance of the fit cannot be used (constants are tied too closely), so no interval can be given.'
		);
	if (fitted.atBound.length > 0)
		add('caution', 'at-bound', `${fitted.atBound.join(', ')}: at a bound, held there in every draw.`);
	if (fitted.untied.length > 0)
		add('note', 'tie-unknown', `${fitted.untied.join(', ')}: tied, held at the estimate in every draw.`);
	const wide = fitted.varied.filter((p) => p.scale === 'ln' && p.error > NATURAL_SCALE_LIMIT);
	if (wide.length > 0)
		add(
			'note',
			'log-scale',
			`${wide.map((p) => p.id).join(', ')}: relative standard error above 20 %, varied on the log scale, where it stays positive.`
		);
	if (propagated.leftOut > 0.001 * (propagated.rows.length + propagated.leftOut))
		add(
			'caution',
			'draws-left-out',
			`${propagated.leftOut} draws gave no usable constants and are left out.`
		);
	return notes;
}

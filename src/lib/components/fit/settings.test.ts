import { describe, expect, it } from 'vitest';
import {
	changed,
	forwardOf,
	problemOf,
	rowOf,
	rowsOf,
	settingsWithout,
	tieTargets,
	without,
	type PlannedRow
} from './settings';

const planned = (over: Partial<PlannedRow> = {}): PlannedRow => ({
	id: 's2.reverse.kRef',
	kind: 'rate',
	state: 'fitted',
	start: { value: 0.2, unit: '1/h' },
	tiedTo: null,
	factor: null,
	unit: '1/h',
	...over
});

describe('the parameter table', () => {
	it('shows the plan until the person says otherwise', () => {
		expect(rowOf(planned(), {})).toMatchObject({ state: 'fitted', value: 0.2, own: false });
		const settings = changed({}, rowOf(planned(), {}), { state: 'fixed' });
		expect(settings).toEqual({ 's2.reverse.kRef': { state: 'fixed', value: { value: 0.2, unit: '1/h' } } });
		expect(rowOf(planned(), settings)).toMatchObject({ state: 'fixed', own: true });
		expect(without(settings, 's2.reverse.kRef')).toEqual({});
	});

	it('keeps bounds for fitted and ties for tied parameters alone', () => {
		const bounded = changed({}, rowOf(planned(), {}), { lower: 0.01, upper: 1 });
		expect(bounded['s2.reverse.kRef'].upper).toEqual({ value: 1, unit: '1/h' });
		const tied = changed(bounded, rowOf(planned(), bounded), {
			state: 'tied',
			to: 's2.forward.kRef',
			factor: 0.32
		});
		expect(tied['s2.reverse.kRef']).toEqual({
			state: 'tied',
			value: { value: 0.2, unit: '1/h' },
			to: 's2.forward.kRef',
			factor: 0.32
		});
	});

	it('offers the choice "one for each run" once a constant, at its first row', () => {
		const shared = planned({ id: 's1.forward.kRef', mayBeLocal: true });
		expect(rowsOf([shared, planned()], {}).map((r) => r.scope)).toEqual(['s1.forward.kRef', null]);
		const own = ['r1', 'r2'].map((run) =>
			planned({ id: `${run}.s1.forward.k`, localOf: 's1.forward.kRef', mayBeLocal: true })
		);
		expect(rowsOf(own, {}).map((r) => r.scope)).toEqual(['s1.forward.kRef', null]);
	});

	it('drops what was said of a constant when its scope changes, but keeps a response factor opened', () => {
		const rows = rowsOf([planned({ id: 'r1.s1.forward.k', localOf: 's1.forward.kRef' })], {});
		const settings = {
			's1.forward.kRef': { state: 'fixed' as const },
			'r1.s1.forward.k': { state: 'fixed' as const },
			'B.responseFactor': { state: 'fitted' as const, upper: { value: 9, unit: '1' } }
		};
		expect(settingsWithout(settings, rows, 's1.forward.kRef')).toEqual({
			'B.responseFactor': settings['B.responseFactor']
		});
		expect(settingsWithout(settings, rows, 'B.responseFactor')['B.responseFactor']).toEqual({
			state: 'fitted'
		});
	});

	it('says what is missing', () => {
		const row = rowOf(planned(), {});
		expect(problemOf({ ...row, state: 'tied' })).toMatch(/tied to/);
		expect(problemOf({ ...row, state: 'fixed', value: null })).toMatch(/value/);
		expect(problemOf({ ...row, lower: 2, upper: 1 })).toMatch(/below/);
		expect(problemOf(row)).toBeNull();
	});

	it('offers ties to others of the same kind, and the forward constant to a reverse one', () => {
		const rows = [
			rowOf(planned(), {}),
			rowOf(planned({ id: 's2.forward.kRef' }), {}),
			rowOf(planned({ id: 's1.forward.activationEnergy', kind: 'energy' }), {}),
			rowOf(planned({ id: 's3.forward.kRef', state: 'tied' }), {})
		];
		expect(tieTargets(rows[0], rows)).toEqual(['s2.forward.kRef']);
		expect(forwardOf('s2.reverse.kRef')).toBe('s2.forward.kRef');
		expect(forwardOf('s2.forward.kRef')).toBeNull();
	});
});

import { describe, expect, it } from 'vitest';
import { SystemBuilder } from './bench/families';
import { blockWeights } from './block-weights';
import { closedForm } from './closed-form';
import { components } from './components';
import { modeGroups } from './mode-groups';
import { modeSpace } from './mode-space';
import { Propagator } from './propagator';
import { triangularModes } from './triangular-modes';
import { judge } from './verdict';

const system = new SystemBuilder(3)
	.step(0, [[1, 1]], 1)
	.step(1, [[2, 1]], 0.3, 0.2)
	.build();
const charge = Float64Array.of(1, 0, 0);

/** Judges the closed form of the system after it has been tampered with. */
function judged(tamper: (amplitudes: Float64Array, size: Float64Array) => void) {
	const parts = components(system);
	const space = modeSpace(system, parts, blockWeights(system, parts));
	const { groups, groupOf } = modeGroups(space);
	const form = closedForm(space, groups, triangularModes(space, groups, groupOf, charge));
	tamper(form.amplitudes, form.size);
	return judge(system, charge, space, groups, form, () => new Propagator(system));
}

describe('the verdict on a closed form', () => {
	it('lets a good one stand, with an estimate', () => {
		const verdict = judged(() => {});
		expect(verdict).toMatchObject({ method: 'symmetrised', useClosedForm: true });
		expect(verdict.errorEstimate).toBeLessThan(1e-13);
	});
	it('lets one stand that rounding could spoil but the comparison vouches for', () => {
		expect(judged((_, size) => (size[1] = 1e6))).toMatchObject({
			useClosedForm: true,
			exactAmplitudes: false
		});
	});
	it('rejects a wrong one that claims to be good: extended precision decides', () => {
		const verdict = judged((amplitudes) => (amplitudes[4] += 1e-6));
		expect(verdict).toMatchObject({ method: 'extended', useClosedForm: false });
		expect(verdict.errorEstimate).toBeLessThan(1e-12);
	});
	it('rejects one that is as bad as its bound allows', () => {
		const verdict = judged((amplitudes, size) => {
			amplitudes[4] += 1e-6;
			size[1] = 1e12;
		});
		expect(verdict).toMatchObject({ method: 'uniformisation', useClosedForm: false });
	});
	it('rejects one with a number that is none', () => {
		expect(judged((_, size) => (size[2] = NaN))).toMatchObject({
			method: 'uniformisation',
			useClosedForm: false
		});
	});
});

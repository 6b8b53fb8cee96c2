/**
 * Property test: random networks of every family against an independent evaluation in extended precision (120 digits, fixed
 * point, Taylor series with scaling and squaring). The long run over 10 000 networks is part of the benchmark command.
 */
import { describe, expect, it } from 'vitest';
import { familyAccuracy } from './bench/accuracy';
import { FAMILIES } from './bench/families';

const NETWORKS_PER_FAMILY = 25;

describe.each(FAMILIES)('random networks: %s', (family) => {
	const found = familyAccuracy(family, 1000, NETWORKS_PER_FAMILY);

	it('errs by less than 1e-12 of the charge at every time', () => {
		expect(found.networks).toBe(NETWORKS_PER_FAMILY);
		expect(found.worst, `seed ${found.worstSeed}`).toBeLessThan(1e-12);
	});
	it('keeps trace amounts right to 1e-9 of themselves', () => {
		expect(found.worstRelative, `seed ${found.worstRelativeSeed}`).toBeLessThan(1e-9);
	});
	it('gives finite, non-negative numbers', () => {
		expect(found.broken).toBe(0);
		expect(found.lowest).toBe(0);
	});
	it('never errs by more than it says', () => {
		expect(found.overEstimate).toBeLessThan(1);
	});
});

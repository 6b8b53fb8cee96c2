import { describe, expect, it } from 'vitest';
import { chargeSchema, type ChargeLine } from '$lib/schemas/recipe';
import { chargesAt } from './charges';

const charge = (line: Record<string, unknown>): ChargeLine => chargeSchema.parse(line);
const limiting = charge({ id: 'a', material: 'HX-14', measure: { by: 'limiting' }, molarMassGPerMol: 200 });

describe('charges at a scale', () => {
	it('reckons equivalents, mass and volume from the limiting material', () => {
		const reagent = charge({
			id: 'b',
			material: 'Amine',
			measure: { by: 'equivalents', value: 1.5 },
			molarMassGPerMol: 100,
			densityKgPerL: 0.8
		});
		const { lines } = chargesAt([limiting, reagent], { value: 2, unit: 'kg' });
		expect(lines[0]).toMatchObject({ amountMol: 10, massKg: 2, equivalents: 1, volumeL: null });
		expect(lines[1].massKg).toBeCloseTo(1.5, 12);
		expect(lines[1].volumeL).toBeCloseTo(1.875, 12);
		expect(lines[1].equivalents).toBeCloseTo(1.5, 12);
	});
	it('charges more of a material whose assay is below 100 % w/w', () => {
		const impure = charge({
			id: 'b',
			material: 'Base',
			measure: { by: 'equivalents', value: 2 },
			molarMassGPerMol: 50,
			assayPercent: 80
		});
		const { lines } = chargesAt([limiting, impure], { value: 10, unit: 'mol' });
		expect(lines[1].amountMol).toBe(20);
		expect(lines[1].massKg).toBeCloseTo(1.25, 12);
	});
	it('takes the assay of the limiting material off its amount', () => {
		const impure = { ...limiting, assayPercent: 95 };
		const { limiting: reference } = chargesAt([impure], { value: 2, unit: 'kg' });
		expect(reference?.amountMol).toBeCloseTo(9.5, 12);
		expect(reference?.massKg).toBeCloseTo(2, 12);
	});
	it('measures a solution by its concentration', () => {
		const solution = charge({
			id: 'b',
			material: 'Acid, 2 mol/L',
			measure: { by: 'equivalents', value: 1 },
			solutionMolPerL: 2,
			densityKgPerL: 1.1
		});
		const { lines } = chargesAt([limiting, solution], { value: 2, unit: 'kg' });
		expect(lines[1].volumeL).toBeCloseTo(5, 12);
		expect(lines[1].massKg).toBeCloseTo(5.5, 12);
	});
	it('charges solvent by volumes and by weight', () => {
		const byVolume = charge({
			id: 'b',
			material: 'Toluene',
			measure: { by: 'volumes', value: 8 },
			densityKgPerL: 0.867
		});
		const byWeight = charge({
			id: 'c',
			material: 'Water',
			measure: { by: 'weight', value: 3 },
			densityKgPerL: 1
		});
		const { lines } = chargesAt([limiting, byVolume, byWeight], { value: 500, unit: 'g' });
		expect(lines[1].volumeL).toBeCloseTo(4, 12);
		expect(lines[1].massKg).toBeCloseTo(3.468, 12);
		expect(lines[2].massKg).toBeCloseTo(1.5, 12);
	});
	it('reckons the amount in a weighed solution from its concentration and density, not from the molar mass', () => {
		const acid = charge({
			id: 'b',
			material: 'Acid, 2 mol/L',
			measure: { by: 'weight', value: 1.1 },
			molarMassGPerMol: 36.46,
			solutionMolPerL: 2,
			densityKgPerL: 1.1
		});
		const { lines } = chargesAt([limiting, acid], { value: 2, unit: 'kg' });
		expect(lines[1].massKg).toBeCloseTo(2.2, 12);
		expect(lines[1].volumeL).toBeCloseTo(2, 12);
		expect(lines[1].amountMol).toBeCloseTo(4, 12);
		expect(lines[1].equivalents).toBeCloseTo(0.4, 12);
		const unknown = chargesAt([limiting, { ...acid, densityKgPerL: null }], { value: 2, unit: 'kg' });
		expect(unknown.lines[1]).toMatchObject({ amountMol: null, missing: ['density of Acid, 2 mol/L'] });
	});
	it('fills up to the set-point concentration with what the other materials leave', () => {
		const solid = { ...limiting, densityKgPerL: 1.25 };
		const solvent = charge({
			id: 's',
			material: 'Solvent',
			measure: { by: 'fill to', value: 0.5 },
			densityKgPerL: 0.9
		});
		const { lines, totalVolumeL } = chargesAt([solid, solvent], { value: 10, unit: 'L' }, 0.5);
		expect(totalVolumeL).toBe(10);
		expect(lines[0].massKg).toBeCloseTo(1, 12);
		expect(lines[1].volumeL).toBeCloseTo(9.2, 12);
		expect(lines[1].massKg).toBeCloseTo(8.28, 12);
	});
	it('says what is missing and never shows a zero for it', () => {
		const unknown = charge({ id: 'b', material: 'Resin', measure: { by: 'equivalents', value: 1 } });
		const { lines, totalMassKg } = chargesAt([limiting, unknown], { value: 1, unit: 'kg' });
		expect(lines[1].massKg).toBeNull();
		expect(lines[1].missing).toEqual(['molar mass of Resin']);
		expect(totalMassKg).toBeNull();
	});
	it('asks for exactly one limiting material', () => {
		expect(chargesAt([], { value: 1, unit: 'kg' }).problems[0]).toMatch(/Mark one material/);
		expect(chargesAt([limiting, { ...limiting, id: 'z' }], { value: 1, unit: 'kg' }).problems[0]).toMatch(
			/Only one/
		);
		expect(chargesAt([limiting], { value: 1, unit: 'L' }).problems[0]).toMatch(/concentration/);
	});
});

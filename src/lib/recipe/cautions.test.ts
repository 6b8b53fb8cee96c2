import { describe, expect, it } from 'vitest';
import { heatSchema, type RecipeContent } from '$lib/schemas/recipe';
import { cautions, DEFAULT_THRESHOLDS, type CautionFacts } from './cautions';
import { sampleRecipe } from './fixture';

const rule = {
	key: 'PS-04',
	title: 'Thermal process safety before scale-up',
	link: 'https://rules.example.invalid/ps-04',
	contact: 'process safety, ext. 4410'
};
const facts = (content: RecipeContent, more: Partial<CautionFacts> = {}): CautionFacts => ({
	content,
	fit: { number: 7, status: 'converged', findings: [] },
	rates: [{ id: 's1.forward.kRef', perH: 1.5, lowerPerH: 1.3, energyJPerMol: null, referenceC: 60 }],
	rules: [rule],
	thresholds: DEFAULT_THRESHOLDS,
	...more
});
const dosed = heatSchema.parse({
	reactionEnthalpyKJPerMol: -140,
	limitingMolPerKg: 1.2,
	heatCapacityKJPerKgK: 1.9,
	doseTimeH: 2,
	doseParameter: 's1.forward.kRef',
	mttC: 101,
	td24C: 132
});
const at60 = sampleRecipe({
	setPoints: [{ ...sampleRecipe().setPoints[0], value: 60, nor: null, par: null, studied: [30, 60] }],
	heat: dosed
});

describe('cautions', () => {
	it('says that heat was not assessed when nothing was entered, and never that it is small', () => {
		const found = cautions(facts(sampleRecipe())).find((c) => c.code === 'heat-not-assessed');
		expect(found?.kind).toBe('not assessed');
		expect(found?.title).toBe('Heat and gas: not assessed.');
		expect(found?.rule).toEqual(rule);
	});
	it('gives accumulation and MTSR at the lower 95 % limit of the rate constant', () => {
		const found = cautions(facts(at60)).find((c) => c.code === 'heat-accumulation');
		expect(found?.found).toMatch(
			/36 % of the dosed reagent is unreacted at the end of the 2 h dose; the calculated MTSR is 91 °C/
		);
		expect(found?.found).toMatch(/not a safety assessment/);
		expect(found?.found).toMatch(/class 1 of the published scheme/);
	});
	it('leaves the order of temperatures unassessed when TD24 is missing', () => {
		const found = cautions(facts({ ...at60, heat: { ...dosed, td24C: null } }));
		expect(found.find((c) => c.code === 'heat-accumulation')?.found).toMatch(/TD24 was not entered/);
		expect(found.find((c) => c.code === 'heat-not-assessed')?.found).toMatch(/TD24/);
	});
	it('warns more strongly of a colder batch', () => {
		const cold = { ...at60, setPoints: [{ ...at60.setPoints[0], value: 45 }] };
		const rates = [
			{ id: 's1.forward.kRef', perH: 1.5, lowerPerH: 1.5, energyJPerMol: 72_000, referenceC: 60 }
		];
		const found = cautions(facts(cold, { rates })).find((c) => c.code === 'heat-accumulation');
		expect(found?.found).toMatch(/MTSR is 104 °C/);
		expect(found?.found).toMatch(/class 3/);
	});
	it('says that accumulation is not assessed when the dose has a time but no rate constant', () => {
		for (const doseParameter of [null, 's9.forward.kRef']) {
			const all = cautions(facts({ ...at60, heat: { ...dosed, doseParameter } }));
			expect(all.find((c) => c.code === 'accumulation-not-assessed')?.kind).toBe('not assessed');
			expect(all.some((c) => c.code === 'heat-accumulation')).toBe(false);
		}
	});
	it('looks for the highest MTSR over the whole permitted range, at its hot end where the rise is small', () => {
		const par = { ...at60, setPoints: [{ ...at60.setPoints[0], par: [55, 70] as [number, number] }] };
		const withEnergy = (energyJPerMol: number) => [
			{ id: 's1.forward.kRef', perH: 0.4, lowerPerH: 0.4, energyJPerMol, referenceC: 60 }
		];
		const found = (heat: typeof dosed, energy: number) =>
			cautions(facts({ ...par, heat }, { rates: withEnergy(energy) })).find(
				(c) => c.code === 'heat-accumulation'
			)?.found;
		// Rise 20 K, Ea 20 kJ/mol: 70 °C + 20 K · Xacc(0.4934 1/h · 2 h) = 70 + 20 · 0.6359 = 82.7 °C; from 55 °C only 69.3 °C.
		const small = { ...dosed, reactionEnthalpyKJPerMol: (-20 * 1.9) / 1.2 };
		expect(found(small, 20_000)).toMatch(/MTSR is 83 °C \(highest from 70 °C\)/);
		// Rise 88.4 K, Ea 72 kJ/mol: the cold end, 55 + 88.4 · 0.7685 = 122.9 °C.
		expect(found(dosed, 72_000)).toMatch(/MTSR is 123 °C\./);
	});
	it('marks set-points and ranges that leave the studied range', () => {
		const wide = sampleRecipe({ setPoints: [{ ...sampleRecipe().setPoints[0], par: [38, 52] }] });
		expect(cautions(facts(wide)).find((c) => c.code === 'outside-studied-range')?.found).toMatch(
			/down to 38 °C/
		);
		expect(cautions(facts(sampleRecipe())).some((c) => c.code === 'outside-studied-range')).toBe(false);
	});
	it('keeps its key while the inputs stay and changes it with them', () => {
		const key = (content: RecipeContent) =>
			cautions(facts(content)).find((c) => c.code === 'heat-accumulation')?.key;
		expect(key(at60)).toBe(key(structuredClone(at60)));
		expect(key(at60)).not.toBe(key({ ...at60, heat: { ...dosed, doseTimeH: 3 } }));
	});
	it('compares the turnaround of the laboratory with the width of the window', () => {
		const ipc = [
			{
				id: 'i1',
				operation: null,
				atMin: 150,
				test: 'A by HPLC',
				limit: 'NMT 1.0 % of charge',
				lagMin: 60,
				ifNotMet: ''
			}
		];
		expect(
			cautions(facts(sampleRecipe({ ipc }))).find((c) => c.code === 'ipc-lag-exceeds-window')?.found
		).toMatch(/48 min wide/);
	});
	it('tells of the findings of the fit', () => {
		const fit = {
			number: 7,
			status: 'converged',
			findings: [{ code: 'lack-of-fit', level: 'stop' as const, message: 'F 45.4' }]
		};
		expect(cautions(facts(sampleRecipe(), { fit })).find((c) => c.code === 'fit-lack-of-fit')?.found).toMatch(
			/F 45.4/
		);
	});
	it('never uses a word of clearance', () => {
		const all = JSON.stringify([...cautions(facts(at60)), ...cautions(facts(sampleRecipe()))]);
		expect(all).not.toMatch(/\b(safe|cleared|pass(es|ed)?|OK|green|approved)\b/i);
	});
});

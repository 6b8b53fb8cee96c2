import { describe, expect, it } from 'vitest';
import { differences, differenceSentence } from './differences';
import { sampleRecipe } from './fixture';

describe('differences between two versions', () => {
	it('finds none between equal contents whatever the order of their keys', () => {
		const a = sampleRecipe();
		const b = Object.fromEntries(Object.entries(a).reverse()) as unknown as typeof a;
		expect(differences(a, b)).toEqual([]);
	});
	it('names each place once', () => {
		const a = sampleRecipe();
		const b = sampleRecipe({
			setPoints: [{ ...a.setPoints[0], value: 49, nor: [48, 50] }],
			hold: { ...a.hold!, stated: 3.8 },
			procedure: [a.procedure[1], a.procedure[0]]
		});
		expect(differences(a, b).map((d) => d.place)).toEqual([
			'Set-points: Hold temperature, set-point',
			'Set-points: Hold temperature, NOR',
			'Hold time: stated',
			'Procedure: order'
		]);
		expect(differenceSentence(4, 2)).toBe('differs from version 2 in 4 places');
	});
	it('shows what was added and what was taken out', () => {
		const a = sampleRecipe();
		const added = differences(
			a,
			sampleRecipe({ equipment: [{ id: 'e1', text: 'Reactor of at least 6 L' }] })
		);
		expect(added).toEqual([
			{
				place: 'Equipment requirements: Reactor of at least 6 L',
				from: null,
				to: 'e1 Reactor of at least 6 L'
			}
		]);
		expect(differences(a, sampleRecipe({ charges: [] }))[0]).toMatchObject({
			place: 'Charges: HX-14',
			to: null
		});
	});
});

import { recipeContent, type RecipeContent } from '$lib/schemas/recipe';

/** An invented recipe for the checks, with overrides. */
export function sampleRecipe(overrides: Partial<RecipeContent> = {}): RecipeContent {
	return {
		...recipeContent.parse({
			title: 'HX-14 ring closure',
			target: 'Hold time at 50 °C with A at most 1.0 % of charge',
			criteria: [],
			basis: {
				fitNumber: 7,
				schemeName: 'Scheme 1',
				schemeNumber: 4,
				runs: [],
				inputHash: 'a'.repeat(64),
				engineVersion: '1.0.0',
				studiedTemperatureC: [40, 60],
				studiedChargeMolPerL: { A: [0.45, 0.55] },
				lastTimeH: 12
			},
			setPoints: [
				{
					id: 't',
					kind: 'temperature',
					parameter: 'Hold temperature',
					unit: '°C',
					value: 50,
					nor: [49, 51],
					par: [48, 52],
					studied: [40, 60]
				}
			],
			hold: { temperatureC: 50, unit: 'h', nominal: 4.2, bound: 3.97, stated: 3.9, notBefore: 3.1 },
			scale: { value: 1, unit: 'kg' },
			charges: [
				{ id: 'c1', material: 'HX-14', species: 'A', measure: { by: 'limiting' }, molarMassGPerMol: 214.2 }
			],
			procedure: [
				{ id: 'o1', kind: 'Charge', durationMin: 15 },
				{ id: 'o2', kind: 'Hold', durationMin: 186 }
			],
			heat: {}
		}),
		...overrides
	};
}

/** Networks for tests, invented. */
import type { Network } from './types';

/**
 * Every kind of law at once: A ⇌ B through its equilibrium with X in excess, B → 2 C, C → loss in Eyring's form, A ⇌ D
 * with a reverse law of its own in Y, and D → loss.
 */
export const everyLaw: Network = {
	species: [...'ABCD'].map((id) => ({ id, name: id })),
	referenceTemperatureK: 315,
	steps: [
		{
			id: 's1',
			reactant: 'A',
			products: [{ species: 'B', coefficient: 1 }],
			forward: {
				form: 'arrhenius',
				kRefPerS: 8e-4,
				energyJPerMol: 60_000,
				excess: [{ species: 'X', order: 1.5 }]
			},
			reverse: { form: 'equilibrium', kEqRef: 2, enthalpyJPerMol: -30_000 }
		},
		{
			id: 's2',
			reactant: 'B',
			products: [{ species: 'C', coefficient: 2 }],
			forward: { form: 'arrhenius', kRefPerS: 2e-4, energyJPerMol: 95_000, excess: [] },
			reverse: null
		},
		{
			id: 's3',
			reactant: 'C',
			products: [],
			forward: {
				form: 'eyring',
				kRefPerS: 5e-5,
				energyJPerMol: 40_000,
				excess: [{ species: 'Y', order: 1 }]
			},
			reverse: null
		},
		{
			id: 's4',
			reactant: 'A',
			products: [{ species: 'D', coefficient: 1 }],
			forward: {
				form: 'arrhenius',
				kRefPerS: 3e-5,
				energyJPerMol: 110_000,
				excess: [{ species: 'X', order: 1 }]
			},
			reverse: {
				form: 'arrhenius',
				kRefPerS: 1e-5,
				energyJPerMol: 120_000,
				excess: [{ species: 'Y', order: 0.5 }]
			}
		},
		{
			id: 's5',
			reactant: 'D',
			products: [],
			forward: { form: 'arrhenius', kRefPerS: 4e-5, energyJPerMol: 70_000, excess: [] },
			reverse: null
		}
	]
};

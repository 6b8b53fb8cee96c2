/**
 * Profile limits of poorly determined fits, where a local search of the inner minimum stops on the wrong branch (invented data,
 * found in a campaign of random fits). The yardstick is the fit itself with the parameter held at the limit and forty starts:
 * it shares the model with the profiles, but none of their path.
 */
import { describe, expect, it } from 'vitest';
import { fitRequest, type FitRequest } from '../../schemas/fit';
import { studentQuantile } from './distributions';
import { fit } from './fit';

interface Sheet {
	temperatureC: number;
	times: number[];
	/** One row a channel. */
	values: number[][];
}

interface Case {
	steps: string[];
	channels: string[];
	/** Amount of A, mol/L; null where it is fitted. */
	charge: number | null;
	energies?: boolean;
	sheets: Sheet[];
}

function request({ steps, channels, charge, energies, sheets }: Case): FitRequest {
	const law = () => ({
		kRef: { value: 1, unit: '1/h' },
		...(energies ? { activationEnergy: { fit: true, guess: { value: 80, unit: 'kJ/mol' } } } : {})
	});
	return fitRequest.parse({
		species: [...new Set(steps.flatMap((s) => s.split(/[>=]/)))].sort().map((id) => ({ id })),
		steps: steps.map((text, i) => {
			const [from, to] = text.split(/[>=]/);
			const reverse = text.includes('=') ? law() : null;
			return { id: `s${i + 1}`, reactant: from, products: [{ species: to }], forward: law(), reverse };
		}),
		referenceTemperature: { value: 50, unit: 'degC' },
		runs: sheets.map(({ temperatureC, times, values }, r) => ({
			id: `r${r + 1}`,
			temperature: { value: temperatureC, unit: 'degC' },
			initial: { A: charge === null ? { fit: true } : { value: charge, unit: 'mol/L' } },
			timeUnit: 'h',
			channels: channels.map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
			timepoints: times.map((time, k) => ({
				time,
				values: Object.fromEntries(channels.map((id, c) => [id, values[c][k]]))
			}))
		})),
		options: { starts: 20 }
	});
}

/** The request with one parameter held at a value in its reported unit. */
function held(given: FitRequest, id: string, value: number, unit: string): FitRequest {
	const copy = structuredClone(given);
	const [step, direction] = id.split('.');
	if (direction === 'initial') copy.runs[0].initial.A = { value, unit };
	else {
		const law = copy.steps.find((s) => s.id === step)![direction as 'forward' | 'reverse'] as {
			kRef: unknown;
			activationEnergy?: unknown;
		};
		if (id.endsWith('kRef')) law.kRef = { value, unit };
		else law.activationEnergy = { value, unit };
		copy.options.fixed = [id];
	}
	copy.options = { ...copy.options, starts: 40, profiles: false };
	return copy;
}

const cases: [string, Case][] = [
	[
		'A → B, A → C, B → C with B alone: C straight from A, or through B',
		{
			steps: ['A>B', 'A>C', 'B>C'],
			channels: ['B'],
			charge: 1,
			sheets: [
				{
					temperatureC: 50,
					times: [0.0931, 0.1862, 0.2793, 0.3725, 0.4656, 0.5587],
					values: [[0.1582, 0.2774, 0.3464, 0.3787, 0.3748, 0.388]]
				}
			]
		}
	],
	[
		'A → B → C with B alone: slow and fast exchanged',
		{
			steps: ['A>B', 'B>C'],
			channels: ['B'],
			charge: 1,
			sheets: [
				{
					temperatureC: 50,
					times: [0.3646, 0.7292, 1.0938, 1.4584, 1.8231, 2.1877],
					values: [[0.0232, 0.0038, 0.0032, 0.0043, 0.0032, 0.0123]]
				}
			]
		}
	],
	[
		'A → B, A → C with A alone: only the sum of both is known',
		{
			steps: ['A>B', 'A>C', 'B>C'],
			channels: ['A'],
			charge: null,
			sheets: [
				{
					temperatureC: 50,
					times: [0.0617, 0.1233, 0.185, 0.2466, 0.3083, 0.3699, 0.4316, 0.4932],
					values: [[0.5894, 0.374, 0.1507, 0.1067, 0.0854, 0.0553, 0.0507, -0.0068]]
				}
			]
		}
	],
	[
		'A alone again, scattered: the charge has a limit although the constants have none',
		{
			steps: ['A>B', 'A>C', 'B>C'],
			channels: ['A'],
			charge: null,
			sheets: [
				{
					temperatureC: 50,
					times: [0.0548, 0.1096, 0.1644, 0.2193, 0.2741, 0.3289, 0.3837],
					values: [[0.5936, 0.4492, 0.1912, 0.1887, 0.1397, 0.0449, 0.1351]]
				}
			]
		}
	],
	[
		'A → B, A → C, B → C with hardly any B: a constant that runs out of sight',
		{
			steps: ['A>B', 'A>C', 'B>C'],
			channels: ['A', 'B', 'C'],
			charge: null,
			sheets: [
				{
					temperatureC: 50,
					times: [0.2049, 0.4099, 0.6148, 0.8198, 1.0247, 1.2296, 1.4346, 1.6395],
					values: [
						[0.6447, 0.396, 0.2506, 0.1699, 0.089, 0.0597, 0.0473, 0.024],
						[0.0187, 0.0033, 0.0039, -0.0074, 0.0018, 0.008, -0.0102, 0.0146],
						[0.3516, 0.5767, 0.7349, 0.8444, 0.8922, 0.931, 0.9511, 0.9764]
					]
				}
			]
		}
	]
];

describe.each(cases)('%s', (_, given) => {
	const own = request(given);
	const report = fit(own);
	const t = studentQuantile(0.975, report.degreesOfFreedom);
	const target = report.weightedSsr * (1 + (t * t) / report.degreesOfFreedom);
	const share = (id: string, value: number, unit: string) =>
		fit(held(own, id, value, unit)).weightedSsr / target;

	it.each(report.fittedIds)('%s: limits are where the misfit reaches the target, whichever branch', (id) => {
		const { estimate, profileCi95, unit } = report.parameters.find((p) => p.id === id)!;
		const amount = id.includes('initial');
		const between = (end: number, part: number) =>
			amount ? estimate + part * (end - estimate) : estimate * (end / estimate) ** part;
		profileCi95!.forEach((end, side) => {
			if (end !== null) {
				expect(share(id, end, unit)).toBeCloseTo(1, 4);
				for (const part of [0.3, 0.8]) expect(share(id, between(end, part), unit)).toBeLessThan(1);
			} else
				for (const far of [2, 6])
					expect(share(id, estimate * Math.exp(side ? far : -far), unit)).toBeLessThan(1);
		});
	});
});

describe('a fit in a flat valley', () => {
	// The reverse of B ⇌ C and its energy leave no trace: the search creeps along where the misfit changes in the ninth digit.
	const given = request({
		steps: ['A>B', 'B=C'],
		channels: ['B', 'C'],
		charge: 1,
		energies: true,
		sheets: [
			{
				temperatureC: 40,
				times: [0.2934, 0.5868, 0.8801, 1.1735, 1.4669, 1.7603, 2.0536, 2.347],
				values: [
					[0.1367, 0.2648, 0.336, 0.3971, 0.4647, 0.502, 0.534, 0.5439],
					[0.0113, -0.0148, 0.0267, 0.0417, 0.0492, 0.0911, 0.1063, 0.1273]
				]
			},
			{
				temperatureC: 60,
				times: [0.0653, 0.1307, 0.196, 0.2613, 0.3266, 0.392, 0.4573, 0.5226],
				values: [
					[0.1348, 0.2561, 0.3758, 0.4039, 0.4733, 0.5046, 0.5801, 0.5799],
					[0.0003, 0.0193, -0.003, 0.0377, 0.0487, 0.0808, 0.0497, 0.0941]
				]
			}
		]
	});
	const report = fit(given);

	it('has converged, and leaves the reverse constant and its energy open', () => {
		expect(report.status).toBe('converged');
		const profile = (id: string) => report.parameters.find((p) => p.id === id)!.profileCi95;
		expect(profile('s2.reverse.kRef')![0]).toBeNull();
		expect(profile('s2.reverse.activationEnergy')).toEqual([null, null]);
		expect(profile('s1.forward.kRef')!.every((end) => end !== null)).toBe(true);
	});
});

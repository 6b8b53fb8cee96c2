/** Studies with a scheme that is not the matter of the test: put in by the calls that the pages make. */
import { expect, type Page } from '@playwright/test';
import { newStudy } from './story';

interface Step {
	from: string;
	to: string;
	k: number;
	/** Constant of the way back; one way without it. */
	back?: number;
}

const law = (value: number) => ({ kRef: { value, unit: '1/h' } });

/** Content of a scheme on A, B and C at 50 °C, constants in 1/h. */
export const contentOf = (steps: Step[]) => ({
	species: [
		{ id: 'A', name: 'HX-14', role: 'starting material', molarMassGPerMol: 214.2, series: 0 },
		{ id: 'B', name: 'HX-14b', role: 'intermediate', molarMassGPerMol: 214.2, series: 1 },
		{ id: 'C', name: 'lactone', role: 'product', molarMassGPerMol: 214.2, series: 2 }
	],
	steps: steps.map((s, i) => ({
		id: `s${i + 1}`,
		reactant: s.from,
		products: [{ species: s.to, coefficient: 1 }],
		forward: law(s.k),
		reverse: s.back === undefined ? null : law(s.back)
	})),
	referenceTemperature: { value: 50, unit: 'degC' }
});

export const REVERSIBLE = contentOf([
	{ from: 'A', to: 'B', k: 0.5 },
	{ from: 'B', to: 'C', k: 0.2, back: 0.1 }
]);
export const ONE_WAY = contentOf([
	{ from: 'A', to: 'B', k: 0.5 },
	{ from: 'B', to: 'C', k: 0.2 }
]);

/** Puts this content into the study's first scheme, as its next version. The page is left away from the station, which would save its own. */
export async function putScheme(page: Page, study: string, content: unknown): Promise<void> {
	await page.goto(`/studies/${study}/data`, { waitUntil: 'networkidle' });
	const answer = await page.evaluate(
		async ({ study, content }) => {
			const view = (await (await fetch(`/api/v1/studies/${study}`)).json()) as {
				schemes: { id: string; version: number }[];
			};
			const { id, version } = view.schemes[0];
			const response = await fetch(`/api/v1/schemes/${id}`, {
				method: 'PATCH',
				headers: { 'content-type': 'application/json', 'if-match': `"${version}"` },
				body: JSON.stringify(content)
			});
			return response.ok ? '' : await response.text();
		},
		{ study, content }
	);
	expect(answer).toBe('');
}

/** A new study whose scheme is there already. */
export async function studyWith(page: Page, name: string, content: unknown): Promise<string> {
	const study = await newStudy(page, name, 'hold time at 50 °C');
	await putScheme(page, study, content);
	return study;
}

/** Address of the finished study of the demonstration. */
export async function demoStudy(page: Page): Promise<string> {
	await page.goto('/studies?q=QN-7', { waitUntil: 'networkidle' });
	const href = await page
		.getByRole('link', { name: /QN-7 coupling/ })
		.first()
		.getAttribute('href');
	return /\/studies\/[0-9a-f-]{36}/.exec(href!)![0];
}

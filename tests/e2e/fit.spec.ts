/** Results of fits in the browser: equal inputs, rival schemes, failures that come before anything good. */
import { expect, test, type Page } from '@playwright/test';
import { ONE_WAY, contentOf, studyWith } from './drawn';
import { SHEETS, studyOf } from './fit-support';
import { startFit, upload } from './story';
import { PEOPLE, signIn, watchConsole } from './support';

test('equal inputs lead to the fit that is there; two fits stand side by side', async ({ page }) => {
	const errors = watchConsole(page);
	const study = await studyOf(page, 'Equal fits', SHEETS.clean);
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await startFit(page);
	const first = page.url();
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await page.getByRole('button', { name: 'Start the fit' }).click();
	await expect(page.getByText(/were fitted before; this is that fit/)).toBeVisible();
	expect(page.url().split('?')[0]).toBe(first.split('?')[0]);

	await page.goto(`/studies/${study}/scheme`, { waitUntil: 'networkidle' });
	await page.getByRole('button', { name: 'Step 2 runs both ways' }).click();
	await expect(page.getByRole('status').filter({ hasText: /^Saved/ })).toBeVisible();
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await page.getByRole('button', { name: 'Start the fit' }).click();
	await expect(page.getByRole('heading', { name: 'Constants at 50 °C' })).toBeVisible({ timeout: 60_000 });
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await expect(page.getByRole('button', { name: 'Compare the chosen fits' })).toBeDisabled();
	for (const number of [1, 2]) await page.getByRole('checkbox', { name: `Compare fit ${number}` }).check();
	await page.getByRole('button', { name: 'Compare the chosen fits' }).click();
	await expect(page.getByRole('heading', { name: 'Figures and constants' })).toBeVisible();
	// Story H1: the irreversible second step is AICc 145 worse.
	const difference = page.getByRole('row', { name: /^AICc above the lowest/ });
	await expect(difference).toContainText('0.0');
	await expect(difference).toContainText(/14[3-7]\.\d/);
	expect(errors).toEqual([]);
});

test('a hidden autocatalysis: the failure stands before any constant (story H9)', async ({ page }) => {
	await signIn(page, PEOPLE.chemist);
	const study = await studyWith(page, 'Hidden autocatalysis', contentOf([{ from: 'A', to: 'B', k: 0.5 }]));
	await upload(page, study, SHEETS.hidden);
	await page.getByRole('button', { name: 'Separate samples: keep each' }).click();
	await answerEverything(page);
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await page.getByText('Charges, energies, error model, search').click();
	await page.getByLabel('Error model').selectOption('replicates');
	await page.getByRole('button', { name: 'Start the fit' }).click();
	const first = page.locator('#main').getByRole('heading', { level: 2 }).first();
	await expect(first).toHaveText('This scheme does not describe these data as it stands', {
		timeout: 60_000
	});
	// Lack of fit of the story, computed for this invented data set: F 45.4 on 8 and 9 degrees of freedom, critical value 3.23.
	await expect(
		page.getByText(/F = 45\.4 on 8 and 9 degrees of freedom, critical value 3\.23/).first()
	).toBeVisible();
	await expect(page.getByText(/autocatalysis/i).first()).toBeVisible();
	await expect(page.getByText(/A recipe on this fit needs a written/)).toBeVisible();
	await expect(page.getByText(/\bsafe\b|good fit|\bpass(ed)?\b/i)).toHaveCount(0);
});

test('a signal of B alone gives two answers, and the fit refuses to choose (story H3)', async ({ page }) => {
	await signIn(page, PEOPLE.chemist);
	const study = await studyWith(page, 'Signal of B alone', ONE_WAY);
	await upload(page, study, 'tests/fixtures/s03_B_signal_only.csv');
	await page.getByRole('button', { name: 'Let the fit find the response factor' }).click();
	await answerEverything(page);
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await page.getByRole('button', { name: 'Start the fit' }).click();
	await expect(
		page.getByRole('heading', { name: 'These data have more than one answer, so none is given' })
	).toBeVisible({ timeout: 60_000 });
	const main = page.locator('#main');
	await expect(main).toContainText(/0\.80/);
	await expect(main).toContainText(/0\.15/);
	await expect(main).toContainText(/5\.3/);
	await expect(page.getByRole('heading', { name: /are determined by these data/ })).toHaveCount(0);
});

/** Takes the first answer of each question left and the charge of the invented reaction, then makes the run. */
async function answerEverything(page: Page): Promise<void> {
	const next = page.getByRole('button', { name: 'Next open question' });
	for (let i = 0; i < 8 && (await next.isVisible()); i++) {
		await next.click();
		await page.keyboard.press('Space');
	}
	await page.getByRole('textbox', { name: 'Temperature', exact: true }).fill('50');
	await page.getByRole('group', { name: 'Charge at time zero' }).getByRole('textbox').first().fill('1');
	await page.getByRole('button', { name: /^Make run/ }).click();
	await expect(page).toHaveURL(/\/data\/runs\//);
}

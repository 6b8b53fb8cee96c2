/** The next samples: before there is any fit, from a fit, and between rival schemes. */
import { expect, test } from '@playwright/test';
import { expectAccessible } from './accessibility';
import { ONE_WAY, contentOf, putScheme, studyWith } from './drawn';
import { SHEETS, studyOf } from './fit-support';
import { startFit } from './story';
import { PEOPLE, signIn, watchConsole } from './support';

test('before the first run: two samples of B for guesses of 0.7 and 0.2 (Box and Lucas 1959)', async ({
	page
}) => {
	const errors = watchConsole(page);
	await signIn(page, PEOPLE.chemist);
	const guessed = contentOf([
		{ from: 'A', to: 'B', k: 0.7 },
		{ from: 'B', to: 'C', k: 0.2 }
	]);
	const study = await studyWith(page, 'Plan before a run', guessed);
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await page.getByRole('link', { name: 'Plan the samples of the first run' }).click();
	await page.getByLabel('Charge of A').fill('1');
	await page.getByRole('checkbox', { name: 'A, HX-14' }).uncheck();
	await page.getByRole('checkbox', { name: 'C, lactone' }).uncheck();
	await page.getByRole('button', { name: 'Plan the times' }).click();
	await expect(
		page.getByText('Give the standard deviation that one value is expected to have.')
	).toBeVisible();
	await page.getByLabel('Expected standard deviation of one value').fill('0.01');
	await page.getByRole('textbox', { name: 'Samples', exact: true }).fill('2');
	await page.getByRole('button', { name: 'Plan the times' }).click();
	// 1.23 and 6.86 h, Biometrika 46 (1959) 77.
	await expect(page.getByText('1.23 h')).toBeVisible();
	await expect(page.getByText('6.86 h')).toBeVisible();
	await expect(page.getByRole('columnheader', { name: '95 % half-width to expect' })).toBeVisible();
	await expectAccessible(page, 'a plan before the first run');
	expect(errors).toEqual([]);
});

test('from a fit: times within working hours, and what they do to each interval', async ({ page }) => {
	const errors = watchConsole(page);
	const study = await studyOf(page, 'Plan from a fit', SHEETS.clean);
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await startFit(page);
	await page.getByRole('link', { name: 'Plan samples', exact: true }).click();
	await page.getByRole('textbox', { name: 'Samples', exact: true }).fill('2');
	await page.getByText('Only in working hours').click();
	await page.getByRole('button', { name: 'Plan the times' }).click();
	await expect(
		page.getByRole('heading', { name: 'Take samples under the conditions of Run 1 at' })
	).toBeVisible();
	await expect(page.getByRole('columnheader', { name: 'expected after' })).toBeVisible();
	const clock = await page
		.getByRole('listitem')
		.filter({ hasText: /\d\d:\d\d/ })
		.allTextContents();
	expect(clock.length).toBeGreaterThan(0);
	for (const text of clock) expect(text).toMatch(/(0[89]|1[0-6]):\d\d|17:00/);
	expect(errors).toEqual([]);
});

test('rival schemes: compared on the same values, with the sample that separates them', async ({ page }) => {
	const errors = watchConsole(page);
	const study = await studyOf(page, 'Rivals and a sample', SHEETS.clean);
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await startFit(page);
	await putScheme(page, study, ONE_WAY);
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await page.getByRole('button', { name: 'Start the fit' }).click();
	await expect(page.getByRole('heading', { name: 'Constants at 50 °C' })).toBeVisible({ timeout: 60_000 });
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	for (const number of [1, 2]) await page.getByRole('checkbox', { name: `Compare fit ${number}` }).check();
	await page.getByRole('button', { name: 'Compare the chosen fits' }).click();
	await expect(page.getByText(/best of those compared/i).first()).toBeVisible();
	const next = page.locator('section, article, div').filter({
		has: page.getByRole('heading', { name: 'The next sample that separates the two best' })
	});
	await expect(next.last()).toContainText(/[ABC] at [\d.]+ h under the conditions of Run 1\s+\(50 °C\)/);
	await expect(next.last()).toContainText(/times its standard error/);
	await expect(page.getByRole('heading', { name: 'Curves and residuals' })).toBeVisible();
	expect(errors).toEqual([]);
});

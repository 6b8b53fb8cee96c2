/** What a fit is for: quantities to decide by with their intervals; and constants moved by hand before a search. */
import { readFileSync } from 'node:fs';
import { expect, test } from '@playwright/test';
import { expectAccessible } from './accessibility';
import { REVERSIBLE, putScheme } from './drawn';
import { SHEETS, studyOf } from './fit-support';
import { confirmSheet, newStudy, startFit, upload } from './story';
import { PEOPLE, signIn, watchConsole } from './support';

test('quantities to decide by come with intervals, from the criteria of the study and by hand', async ({
	page
}) => {
	const errors = watchConsole(page);
	await signIn(page, PEOPLE.chemist);
	const study = await newStudy(page, 'What to decide by', 'when to quench at 50 °C', [
		{ species: 'A', relation: 'NMT', limit: '5' },
		{ species: 'C', relation: 'NMT', limit: '20' }
	]);
	await putScheme(page, study, REVERSIBLE);
	await upload(page, study, SHEETS.clean);
	await confirmSheet(page, { celsius: '50', charge: { 'A, HX-14': '0.5' } });
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await startFit(page);
	// Story H1: B is at its most, 0.2857 mol/L, at 2.13 h.
	await expect(page.getByRole('heading', { level: 2 }).first()).toContainText(
		/B is at its most, 0\.285\d* mol\/L, at 2\.13\d* h \(2\.\d+ to 2\.\d+\)/
	);
	const table = page.getByRole('region', { name: 'Quantities to decide by' });
	const row = (name: RegExp) => table.getByRole('row', { name });
	// A decays with k₁ 0.794 1/h: 5 % are left after ln 20/k₁ = 3.77 h.
	await expect(row(/A NMT 5 % of charge: first met at/)).toContainText(
		/3\.7\d*\s?h\s+3\.\d+ to 3\.\d+\s+profile/
	);
	await expect(row(/C NMT 20 % of charge: holds until/)).toContainText(/profile likelihood/);
	await expect(row(/^B at 24 h/)).toContainText(/linear \(delta method\)/);

	await page.getByLabel('Add', { exact: true }).selectOption('conversion');
	await page.getByRole('textbox', { name: 'Converted' }).fill('90');
	await page.getByRole('button', { name: 'Add the quantity' }).click();
	await expect(row(/90 % conversion of A at/)).toContainText(/2\.(89|9)\d*\s?h/);
	await page.getByRole('button', { name: 'Remove 90 % conversion of A at' }).click();
	await expect(row(/90 % conversion/)).toHaveCount(0);
	await expectAccessible(page, 'a result with quantities to decide by');
	expect(errors).toEqual([]);
});

test('by hand first: the misfit follows a slider, and the search begins there', async ({ page }) => {
	const errors = watchConsole(page);
	const study = await studyOf(page, 'By hand first', SHEETS.clean);
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await page.getByRole('link', { name: 'Try by hand first' }).click();
	const misfit = page.getByRole('status').filter({ hasText: 'weighted sum of squares' });
	await expect(misfit).toBeVisible();
	const before = await misfit.textContent();
	await page.getByRole('textbox', { name: /^k₁, A → B/ }).fill('0.79');
	await page.getByRole('textbox', { name: /^k₁, A → B/ }).press('Tab');
	await expect(misfit).not.toHaveText(before!);
	const slider = page.getByRole('slider', { name: 'Slider of k₂, B → C' });
	await slider.focus();
	const moved = await misfit.textContent();
	for (let i = 0; i < 5; i++) await page.keyboard.press('ArrowRight');
	await expect(misfit).not.toHaveText(moved!);
	await page.getByRole('button', { name: 'Fit from here' }).click();
	await expect(page.getByRole('heading', { name: 'Constants at 50 °C' })).toBeVisible({ timeout: 60_000 });
	// Story H1: k₁ 0.794 1/h.
	await expect(page.getByRole('region', { name: 'Constants of the fit' })).toContainText(/0\.79[34]/);
	expect(errors).toEqual([]);
});

/** The clean sheet with every time halved: made up as the same reaction twice as fast. */
function twiceAsFast(): Buffer {
	const [head, ...rows] = readFileSync(SHEETS.clean, 'utf8').trim().split(/\r?\n/);
	const halved = rows.map((row) => row.replace(/^[\d.]+/, (time) => String(Number(time) / 2)));
	return Buffer.from([head, ...halved].join('\n'));
}

test('a constant of its own for each run is chosen before the fit and shown after it', async ({ page }) => {
	const errors = watchConsole(page);
	const study = await studyOf(page, 'Each run for itself', SHEETS.clean);
	await upload(page, study, { name: 'faster.csv', mimeType: 'text/csv', buffer: twiceAsFast() });
	await confirmSheet(page, { celsius: '58', charge: { 'A, HX-14': '0.5' } });
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await page.getByText('Parameters: fitted, fixed, bounded, tied, for each run').click();
	await page.getByLabel('Scope of k₁, A → B').selectOption('one for each run');
	const planned = page.getByRole('list').filter({ hasText: 'A → B, Run 1' });
	await expect(planned).toContainText('A → B, Run 2');
	// What was opened stays open while the plan is asked for again.
	await expect(page.getByLabel(/^Scope of k₁/).first()).toBeVisible();
	await startFit(page);
	const constants = page.getByRole('region', { name: 'Constants of the fit' });
	await expect(constants).toContainText('A → B, Run 1');
	await expect(constants).toContainText('A → B, Run 2');
	await expect(
		page.getByText('windows and recipes need a fit with constants that all runs share')
	).toBeVisible();
	await expect(page.getByRole('link', { name: 'Make a recipe' })).toHaveCount(0);
	expect(errors).toEqual([]);
});

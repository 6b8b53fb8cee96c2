/** Parts of the data station that several stories look at. */
import { expect, type Locator, type Page } from '@playwright/test';
import { signIn, PEOPLE } from './support';
import { REVERSIBLE, studyWith } from './drawn';
import { upload } from './story';

export const MESSY = 'tests/fixtures/s02_messy.xlsx';
export const CLEAN = 'tests/fixtures/s01_clean_50C.csv';

export const counts = (page: Page): Locator =>
	page.locator('section', { hasText: 'To settle before' }).locator('header .small').first();
export const cell = (page: Page, address: string): Locator =>
	page.locator(`[role="gridcell"][id$="-${address}"]`);
export const points = (page: Page): Locator => page.getByRole('region', { name: 'Points of the run' });

/** Charge and temperature by the fields; what they become is at the left of the same page. */
export async function giveConditions(page: Page): Promise<void> {
	await page.getByRole('textbox', { name: 'Temperature', exact: true }).fill('50');
	const charges = page.getByRole('group', { name: 'Charge at time zero' });
	await charges.getByRole('textbox', { name: /^A\b/ }).fill('0.5');
	await charges.getByLabel(/^Unit of A\b/).selectOption('mol/L');
}

export const csv = (name: string, lines: string[]) => ({
	name,
	mimeType: 'text/csv',
	buffer: Buffer.from(`${lines.join('\n')}\n`)
});

/** A chemist's new study with one sheet open, whose table the reader has looked through. */
export async function openSheet(
	page: Page,
	study: string,
	file: Parameters<typeof upload>[2],
	person: string = PEOPLE.chemist
): Promise<string> {
	await signIn(page, person);
	const id = await studyWith(page, study, REVERSIBLE);
	await upload(page, id, file);
	await expect(counts(page)).toHaveText(/stop/);
	return id;
}

export async function makeRun(page: Page): Promise<void> {
	await page.getByRole('button', { name: /^Make run/ }).click();
	await expect(page).toHaveURL(/\/data\/runs\//);
	await page.waitForLoadState('networkidle');
}

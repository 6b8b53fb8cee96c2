/** Steps that several stories share, each done as a person would do it. */
import { expect, type Page } from '@playwright/test';
import { dragTo } from './support';

export interface Criterion {
	species: string;
	relation: 'NMT' | 'NLT';
	limit: string;
}

export async function newStudy(
	page: Page,
	name: string,
	decision: string,
	criteria: Criterion[] = []
): Promise<string> {
	await page.goto('/studies/new');
	await page.getByLabel('Name of the study').fill(name);
	await page.getByLabel('What has to be decided').fill(decision);
	for (const [i, criterion] of criteria.entries()) {
		const row = page.getByRole('group', { name: `Criterion ${i + 1}` });
		await row.getByLabel('Species').fill(criterion.species);
		await row.getByLabel('Relation').selectOption(criterion.relation);
		await row.getByLabel('Limit', { exact: true }).fill(criterion.limit);
		await row.getByLabel('Unit and basis').selectOption({ label: '% of charge' });
	}
	await page.getByRole('button', { name: 'Create the study' }).click();
	await expect(page).toHaveURL(/\/studies\/[0-9a-f-]{36}\/scheme/);
	return /\/studies\/([0-9a-f-]{36})/.exec(page.url())![1];
}

export async function addSpecies(page: Page, symbols: string[]): Promise<void> {
	for (const symbol of symbols) {
		await page.getByRole('button', { name: 'Add species' }).click();
		const dialog = page.getByRole('dialog', { name: 'New species' });
		await dialog.getByLabel('Symbol').fill(symbol);
		await dialog.getByLabel('Symbol').press('Enter');
		await expect(dialog).toBeHidden();
	}
}

const chip = (page: Page, symbol: string) =>
	page
		.getByRole('group', { name: 'Tray of species' })
		.getByRole('button', { name: new RegExp(`^${symbol},`) });

/** Carries two species into the row for a new step, with the mouse. */
export async function dragStep(page: Page, number: number, from: string, to: string): Promise<void> {
	await dragTo(page, chip(page, from), page.getByRole('group', { name: 'reactant of a new step' }));
	const row = page.getByRole('listitem', { name: `Step ${number}`, exact: true });
	await expect(row).toBeVisible();
	await dragTo(
		page,
		chip(page, to),
		page.getByRole('group', { name: `product of step ${number}`, exact: true })
	);
	await expect(page.getByRole('button', { name: `${to}, product of step ${number}` })).toBeVisible();
}

/** Picks a species up with Space, carries it with the arrow keys until it lies over the place, drops it with Space. */
export async function carryByKeyboard(page: Page, symbol: string, place: string): Promise<void> {
	await chip(page, symbol).focus();
	await page.keyboard.press('Space');
	const target = page.getByRole('group', { name: place, exact: true });
	for (let i = 0; i < 30; i++) {
		await page.keyboard.press('ArrowDown');
		const there = target.getByText(symbol, { exact: true });
		if (
			await there.waitFor({ timeout: 400 }).then(
				() => true,
				() => false
			)
		)
			break;
	}
	await page.keyboard.press('Space');
}

export async function saved(page: Page): Promise<void> {
	await expect(page.getByRole('status').filter({ hasText: /^Saved/ })).toBeVisible();
}

export async function upload(
	page: Page,
	study: string,
	file: string | { name: string; mimeType: string; buffer: Buffer }
): Promise<void> {
	// The page must be alive before a file is handed to it.
	await page.goto(`/studies/${study}/data`, { waitUntil: 'networkidle' });
	await page.getByLabel('Assay sheet').setInputFiles(file);
	await expect(page).toHaveURL(/\/data\/sheets\//);
}

export interface SheetConditions {
	celsius: string;
	charge: Record<string, string>;
	chargeUnit?: string;
}

/** Gives the conditions of the run and makes it; nothing else was open in the sheet. */
export async function confirmSheet(page: Page, given: SheetConditions): Promise<void> {
	await page.getByRole('textbox', { name: 'Temperature', exact: true }).fill(given.celsius);
	const charges = page.getByRole('group', { name: 'Charge at time zero' });
	for (const [species, amount] of Object.entries(given.charge)) {
		await charges.getByRole('textbox', { name: species, exact: true }).fill(amount);
		if (given.chargeUnit)
			await charges.getByLabel(`Unit of ${species}`, { exact: true }).selectOption(given.chargeUnit);
	}
	await page.getByRole('button', { name: /^Make run/ }).click();
	// A sheet with thousands of rows takes its time on a busy machine.
	await expect(page).toHaveURL(/\/data\/runs\//, { timeout: 30_000 });
}

/** Starts the fit as the page stands and waits for its result. */
export async function startFit(page: Page): Promise<void> {
	await page.getByRole('button', { name: 'Start the fit' }).click();
	await expect(page.getByRole('heading', { name: /constants? (are|is) determined/ })).toBeVisible({
		timeout: 60_000
	});
}

/** Estimate and standard error of the rate constant of a step, in full precision, from the table of the fit. */
export async function constantOf(
	page: Page,
	step: string
): Promise<{ estimate: number; standardError: number }> {
	const row = page
		.getByRole('region', { name: 'Constants of the fit' })
		.getByRole('row')
		.filter({ hasText: step });
	const [estimate, standardError] = await row.first().locator('.num').all();
	const full = async (cell: typeof estimate) => Number.parseFloat((await cell.getAttribute('title'))!);
	return { estimate: await full(estimate), standardError: await full(standardError) };
}

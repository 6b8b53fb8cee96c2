/** The scheme station: dragging and its other ways, undo and autosave, two people at once, numbers and their units. */
import { expect, test, type Browser, type Page } from '@playwright/test';
import { PEOPLE, signIn, watchConsole } from './support';
import { addSpecies, carryByKeyboard, dragStep, newStudy, saved } from './story';

const chip = (page: Page, symbol: string) =>
	page
		.getByRole('group', { name: 'Tray of species' })
		.getByRole('button', { name: new RegExp(`^${symbol},`) });
const place = (page: Page, name: string) => page.getByRole('group', { name, exact: true });
const step = (page: Page, number: number) =>
	page.getByRole('listitem', { name: `Step ${number}`, exact: true });
const constant = (page: Page, number: number) =>
	page.getByRole('textbox', { name: `Rate constant of step ${number}`, exact: true });
const formulaOf = (page: Page) =>
	page.locator('section', { has: page.getByRole('heading', { name: 'Closed form' }) }).first();

/** A study with A and B on its tray, signed in as the chemist. */
async function begin(page: Page, name: string): Promise<string> {
	await signIn(page, PEOPLE.chemist);
	const study = await newStudy(page, name, 'hold time at 40 °C');
	await addSpecies(page, ['A', 'B']);
	return study;
}

async function putByMenu(page: Page, where: string, item: string): Promise<void> {
	await page.getByRole('button', { name: `Choose the ${where}`, exact: true }).click();
	await page.getByRole('menuitem', { name: item }).click();
}

/** The first step, A → B, by menu. */
async function stepByMenu(page: Page): Promise<void> {
	await putByMenu(page, 'reactant of a new step', 'Put A into a new step as reactant');
	await putByMenu(page, 'product of step 1', 'Put B in step 1 as product');
	await expect(page.getByRole('button', { name: 'B, product of step 1' })).toBeVisible();
}

async function otherPerson(browser: Browser, email: string, path: string): Promise<Page> {
	const page = await (await browser.newContext()).newPage();
	await signIn(page, email);
	await page.goto(path, { waitUntil: 'networkidle' });
	return page;
}

test('a drag that Escape ends changes nothing, by mouse and by keyboard', async ({ page }) => {
	const errors = watchConsole(page);
	await begin(page, 'Drags that end early');
	const from = (await chip(page, 'A').boundingBox())!;
	const to = (await place(page, 'reactant of a new step').boundingBox())!;
	await page.mouse.move(from.x + 10, from.y + 10);
	await page.mouse.down();
	await page.mouse.move(from.x + 20, from.y + 20, { steps: 4 });
	await page.mouse.move(to.x + to.width / 2, to.y + to.height / 2, { steps: 10 });
	await page.waitForTimeout(250);
	await page.keyboard.press('Escape');
	await page.mouse.up();
	await expect(page.getByText('A put back.')).toBeAttached();
	await expect(step(page, 1)).toHaveCount(0);
	await expect(chip(page, 'A')).toHaveCount(1);

	await chip(page, 'B').focus();
	await page.keyboard.press('Space');
	await page.keyboard.press('ArrowDown');
	await page.keyboard.press('Escape');
	await expect(page.getByText('B put back.')).toBeAttached();
	await expect(step(page, 1)).toHaveCount(0);
	// Nothing is stuck: the next drag works.
	await dragStep(page, 1, 'A', 'B');
	expect(errors).toEqual([]);
});

test('an occupied place takes a second product, the same one once more, and another reactant instead', async ({
	page
}) => {
	await begin(page, 'Occupied places');
	await addSpecies(page, ['C']);
	await dragStep(page, 1, 'A', 'B');
	await carryByKeyboard(page, 'C', 'product of step 1');
	await expect(page.getByRole('button', { name: 'C, product of step 1' })).toBeVisible();
	await expect(page.getByRole('button', { name: 'B, product of step 1' })).toBeVisible();
	await expect(page.getByRole('button', { name: 'Step 1 runs one way' })).toBeDisabled();
	await putByMenu(page, 'product of step 1', 'Put C in step 1 as product');
	await expect(page.getByRole('button', { name: '2 C, product of step 1' })).toBeVisible();
	await putByMenu(page, 'reactant of step 1', 'Put C in step 1 as reactant');
	await expect(page.getByRole('button', { name: 'C, reactant of step 1' })).toBeVisible();
	await expect(page.getByRole('button', { name: 'A, reactant of step 1' })).toHaveCount(0);
	await putByMenu(page, 'product of step 1', 'Take C out');
	await expect(page.getByRole('button', { name: '2 C, product of step 1' })).toHaveCount(0);
});

test('undo and redo by button and by keyboard, saved with the time, kept over a reload', async ({ page }) => {
	const errors = watchConsole(page);
	await begin(page, 'Undo and redo');
	await stepByMenu(page);
	await saved(page);
	await expect(page.getByRole('status').filter({ hasText: /^Saved \d\d:\d\d$/ })).toBeVisible();
	const product = page.getByRole('button', { name: 'B, product of step 1' });
	await page.getByRole('button', { name: 'Undo' }).click();
	await expect(product).toHaveCount(0);
	await page.keyboard.press('Control+z');
	await expect(step(page, 1)).toHaveCount(0);
	await page.keyboard.press('Control+Shift+z');
	await expect(step(page, 1)).toBeVisible();
	await page.getByRole('button', { name: 'Redo' }).click();
	await expect(product).toBeVisible();
	await expect(page.getByRole('button', { name: 'Redo' })).toBeDisabled();
	await page.getByRole('button', { name: 'Step 1 runs one way' }).click();
	await saved(page);
	await page.reload();
	await expect(product).toBeVisible();
	await expect(page.getByRole('button', { name: 'Step 1 runs both ways' })).toBeVisible();
	expect(errors).toEqual([]);
});

test('two people editing at once see both sides; each choice keeps the other in the versions', async ({
	browser,
	page
}) => {
	const study = await begin(page, 'Two at one scheme');
	await stepByMenu(page);
	await saved(page);
	await page.reload({ waitUntil: 'networkidle' });
	const lead = await otherPerson(browser, PEOPLE.lead, `/studies/${study}/scheme`);
	await constant(lead, 1).fill('0.7');
	await saved(lead);

	await constant(page, 1).fill('0.9');
	const dialog = page.getByRole('dialog', { name: 'Two people changed this scheme' });
	await expect(dialog).toBeVisible();
	await expect(dialog).toContainText('Tunde Adeyemi');
	const row = dialog.getByRole('row', { name: /^step 1/ });
	await expect(row).toContainText('0.9 1/h');
	await expect(row).toContainText('0.7 1/h');
	// Put off, the page says so and nothing is overwritten.
	await page.keyboard.press('Escape');
	await expect(page.getByText('Your changes are not saved.')).toBeVisible();
	await lead.reload({ waitUntil: 'networkidle' });
	await expect(constant(lead, 1)).toHaveValue('0.7');
	await page.getByRole('button', { name: 'Compare the two' }).click();
	await dialog.getByRole('button', { name: 'Take theirs' }).click();
	await expect(constant(page, 1)).toHaveValue('0.7');
	// Mine is one undo away.
	await page.getByRole('button', { name: 'Undo' }).click();
	await expect(constant(page, 1)).toHaveValue('0.9');
	await saved(page);

	await constant(lead, 1).fill('0.65');
	const second = lead.getByRole('dialog', { name: 'Two people changed this scheme' });
	await expect(second).toContainText('Mira Okafor');
	await second.getByRole('button', { name: 'Save mine as the next version' }).click();
	await saved(lead);
	await page.reload({ waitUntil: 'networkidle' });
	await expect(constant(page, 1)).toHaveValue('0.65');
});

test('QA sees the scheme and can change nothing in it', async ({ browser, page }) => {
	const study = await begin(page, 'Looked at by QA');
	await stepByMenu(page);
	await saved(page);
	const qa = await otherPerson(browser, PEOPLE.qa, `/studies/${study}/scheme`);
	await expect(qa.getByText('you may look, not change')).toBeVisible();
	await expect(constant(qa, 1)).toBeDisabled();
	await expect(qa.getByRole('button', { name: 'Add species' })).toHaveCount(0);
	await expect(qa.getByRole('button', { name: 'Undo' })).toHaveCount(0);
	await expect(qa.getByRole('button', { name: 'Step 1 runs one way' })).toBeDisabled();
});

test('numbers and units: refusals beside the field, a conversion that asks, live curves and matrix', async ({
	page
}) => {
	const errors = watchConsole(page);
	await begin(page, 'Numbers with units');
	await stepByMenu(page);
	const k = constant(page, 1);
	const before = await formulaOf(page).innerText();
	await k.fill('o.5');
	await expect(
		step(page, 1)
			.getByText(/number/i)
			.first()
	).toBeVisible();
	await expect(k).toHaveAttribute('aria-invalid', 'true');
	await k.fill('-1');
	await expect(step(page, 1).locator('.error, .finding.stop').first()).toBeVisible();
	await k.fill('1.2');
	await expect(step(page, 1)).toContainText('Half of A is gone in 35 min');
	await expect.poll(() => formulaOf(page).innerText()).not.toBe(before);

	await page.getByRole('combobox', { name: 'Unit of Rate constant of step 1' }).selectOption('1/min');
	await page.getByRole('button', { name: /^Convert to 0\.020* 1\/min$/ }).click();
	await expect(k).toHaveValue('0.02');
	await expect(step(page, 1)).toContainText('Half of A is gone in 35 min');

	const typed = await formulaOf(page).innerText();
	const slider = page.getByRole('slider', { name: 'Rate constant of step 1, slider' });
	await slider.focus();
	for (let i = 0; i < 12; i++) await page.keyboard.press('ArrowRight');
	await expect(k).not.toHaveValue('0.02');
	await expect.poll(() => formulaOf(page).innerText()).not.toBe(typed);

	const matrix = page.getByRole('table', { name: /Rate matrix/ });
	// The step with the keyboard's focus is lit too; first neither focus nor pointer is on it.
	await slider.blur();
	await page.mouse.move(2, 2);
	await expect(matrix.locator('td.lit')).toHaveCount(0);
	await step(page, 1).hover();
	await expect(matrix.locator('td.lit')).toHaveCount(2);
	await saved(page);
	expect(errors).toEqual([]);
});

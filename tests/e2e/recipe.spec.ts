/** Recipes: a draft in work, review and signature by two people, withdrawal, and what the group that holds it sees. */
import { expect, test, type Browser, type Locator, type Page } from '@playwright/test';
import { demoStudy } from './drawn';
import { chooseGroup } from './mail';
import { DEMO_PASSWORD, PEOPLE, dragTo, signIn, watchConsole } from './support';
import { saved } from './story';

async function as(browser: Browser, email: string): Promise<Page> {
	const page = await (await browser.newContext({ reducedMotion: 'reduce' })).newPage();
	await signIn(page, email);
	return page;
}

async function beginDraft(page: Page, title: string): Promise<string> {
	await page.goto(`${await demoStudy(page)}/recipe`, { waitUntil: 'networkidle' });
	await page.getByLabel('Title').fill(title);
	await page.getByRole('button', { name: 'Begin the draft' }).click();
	await expect(page).toHaveURL(/\/recipes\/[0-9a-f-]{36}/);
	await page.waitForLoadState('networkidle');
	return page.url();
}

const part = (page: Page, title: string): Locator =>
	page.locator('section', { has: page.getByRole('heading', { name: title, exact: true }) });
const operations = (page: Page) => part(page, 'Procedure').getByRole('listitem');
const grip = (page: Page, number: number) =>
	page.getByRole('button', { name: new RegExp(`^Operation ${number},`) });

async function sign(page: Page, meaning: string, password = DEMO_PASSWORD): Promise<Locator> {
	const dialog = page.getByRole('dialog', { name: `Sign as ${meaning}` });
	await dialog.getByLabel('Your password, once more').fill(password);
	await dialog.getByRole('button', { name: `Sign as ${meaning}` }).click();
	return dialog;
}

async function submit(page: Page): Promise<void> {
	await page.getByLabel('Run to hold the kinetics against').selectOption({ index: 1 });
	await expect(page.getByText(/points lie inside the 95 % prediction band/)).toBeVisible();
	await saved(page);
	await page.getByRole('button', { name: 'Submit for review' }).click();
	await expect(await sign(page, 'authored')).toBeHidden();
	await expect(page.getByText('In review').first()).toBeVisible();
}

test('a draft: operations reordered by keys and by mouse, statements from the list, charges at another scale', async ({
	page
}) => {
	const errors = watchConsole(page);
	await signIn(page, PEOPLE.chemist);
	await beginDraft(page, 'Draft in work');
	const procedure = part(page, 'Procedure');
	for (const text of ['Charge the solvent', 'Add the base']) {
		await procedure.getByRole('button', { name: 'Add an operation' }).click();
		await procedure.getByLabel('Text', { exact: true }).fill(text);
		await procedure.getByRole('button', { name: /^close/ }).click();
	}
	const last = await operations(page).count();
	await expect(operations(page).nth(last - 1)).toContainText('Add the base');
	await grip(page, last).focus();
	await page.keyboard.press('Alt+ArrowUp');
	await expect(operations(page).nth(last - 2)).toContainText('Add the base');
	await expect(grip(page, last - 1)).toBeFocused();
	await dragTo(page, grip(page, last - 1), grip(page, last));
	await expect(operations(page).nth(last - 1)).toContainText('Add the base');
	await page
		.getByRole('toolbar', { name: 'Changes to this draft' })
		.getByRole('button', { name: 'Undo' })
		.click();
	await expect(operations(page).nth(last - 2)).toContainText('Add the base');

	const hazards = part(page, 'Hazard statements');
	await hazards.getByLabel('Product').fill('Base solution');
	await hazards.getByLabel('Supplier').fill('Invented Supplies');
	await hazards.getByLabel('Revision date').fill('2026-03-02');
	await hazards.getByRole('button', { name: 'Add a safety data sheet' }).click();
	await hazards.getByLabel('Find a statement by code or words').last().fill('H319');
	await page
		.getByRole('list', { name: 'Statements of the GHS list' })
		.getByRole('button', { name: /H319/ })
		.click();
	await expect(hazards.getByLabel('Wording of H319')).toHaveValue('Causes serious eye irritation');

	const charges = part(page, 'Charges');
	const masses = () => charges.locator('.line').first().innerText();
	const before = await masses();
	const scale = charges.getByLabel('Scale', { exact: true });
	await scale.fill(String(2 * Number(await scale.inputValue())));
	if (/\d/.test(before)) await expect.poll(masses).not.toBe(before);
	await saved(page);
	await page.reload({ waitUntil: 'networkidle' });
	await expect(operations(page).nth(last - 2)).toContainText('Add the base');
	await expect(part(page, 'Hazard statements').getByLabel('Wording of H319')).toBeVisible();
	expect(errors).toEqual([]);
});

test('review: no signature of the author, no wrong password, a return with its comment, a reason for the next version', async ({
	browser,
	page
}) => {
	test.setTimeout(120_000);
	await signIn(page, PEOPLE.chemist);
	const recipe = await beginDraft(page, 'Recipe under review');
	await submit(page);
	await expect(page.getByRole('button', { name: 'Sign as validated' })).toHaveCount(0);

	const lead = await as(browser, PEOPLE.lead);
	await lead.goto(recipe, { waitUntil: 'networkidle' });
	await lead.getByRole('button', { name: 'Sign as validated' }).click();
	const dialog = await sign(lead, 'validated', 'not my password');
	await expect(dialog.locator('.notice.refusal')).toContainText(/password/i);
	await expect(dialog.getByLabel('Your password, once more')).toHaveValue('');
	await dialog.getByRole('button', { name: 'Not now' }).click();
	await lead.getByRole('button', { name: 'Return with comment' }).click();
	const returning = lead.getByRole('dialog', { name: 'Return with a comment' });
	await returning.getByLabel('What has to change').fill('Say how the base is added, please.');
	await returning.getByRole('button', { name: 'Return it' }).click();
	await expect(returning).toBeHidden();
	await expect(lead.getByText('Returned').first()).toBeVisible();

	await page.goto(recipe, { waitUntil: 'networkidle' });
	await expect(page.getByText('Say how the base is added, please.')).toBeVisible();
	await page.getByRole('button', { name: 'Start a new version' }).click();
	const next = page.getByRole('dialog', { name: 'Start a new version' });
	await next.getByLabel('Reason for the change').fill('.....');
	await next.getByRole('button', { name: 'Start it' }).click();
	await expect(next.locator('.notice.refusal')).toBeVisible();
	await next.getByLabel('Reason for the change').fill('The way of adding the base is described.');
	await next.getByRole('button', { name: 'Start it' }).click();
	await expect(page.getByRole('heading', { name: /Recipe under review, version 2/ })).toBeVisible();
	await expect(page.getByText('Draft').first()).toBeVisible();
	await expect(
		page.getByText('Reason for this version: The way of adding the base is described.')
	).toBeVisible();
});

test('validated, shared, read with its cautions, withdrawn: the holder sees the banner and never the study', async ({
	browser,
	page
}) => {
	test.setTimeout(150_000);
	await signIn(page, PEOPLE.chemist);
	const recipe = await beginDraft(page, 'Recipe that is withdrawn');
	await submit(page);
	const lead = await as(browser, PEOPLE.lead);
	await lead.goto(recipe, { waitUntil: 'networkidle' });
	await lead.getByRole('button', { name: 'Sign as validated' }).click();
	await lead
		.getByLabel(/^Comment/)
		.last()
		.fill('Seen against the run that was kept back.');
	await expect(await sign(lead, 'validated')).toBeHidden();
	await expect(lead.getByText('Validated').first()).toBeVisible();
	await lead.getByRole('button', { name: 'Share with a group' }).click();
	const share = lead.getByRole('dialog', { name: /^Share version/ });
	await share.getByLabel('Group').selectOption({ label: 'Pilot Hall' });
	await share.getByRole('button', { name: 'Share it' }).click();
	await expect(share).toBeHidden();

	const reader = await as(browser, PEOPLE.reader);
	const errors = watchConsole(reader);
	await chooseGroup(reader, 'Pilot Hall');
	await reader.goto('/shared', { waitUntil: 'networkidle' });
	await reader
		.getByRole('link', { name: /Recipe that is withdrawn/ })
		.first()
		.click();
	await expect(reader.getByRole('heading', { level: 1, name: /Recipe that is withdrawn/ })).toBeVisible();
	await reader.waitForLoadState('networkidle');
	await reader
		.getByRole('button', { name: /^Record that I read/ })
		.first()
		.click();
	await expect(reader.getByText(/^Read by Jonas Reyes/).first()).toBeVisible();
	await reader.getByRole('button', { name: 'I have read version 1' }).click();
	await expect(reader.getByText(/You said to have read this version/)).toBeVisible();
	await reader.emulateMedia({ media: 'print' });
	await expect(reader.getByRole('banner')).toBeHidden();
	await expect(reader.getByRole('button', { name: 'Print' })).toBeHidden();
	await expect(reader.getByRole('heading', { name: /Recipe that is withdrawn/ }).first()).toBeVisible();
	const sheet = await reader.pdf({ format: 'A4' });
	expect(sheet.byteLength).toBeGreaterThan(10_000);
	await reader.emulateMedia({ media: 'screen' });
	expect(errors).toEqual([]);

	await lead.getByRole('button', { name: 'Withdraw', exact: true }).click();
	const dialog = lead.getByRole('dialog', { name: /^Withdraw version/ });
	await dialog.getByLabel('Reason').fill('The confirmation run was mislabelled.');
	await dialog.getByRole('button', { name: 'Withdraw it' }).click();
	await expect(dialog).toBeHidden();
	await reader.reload();
	await expect(reader.getByText('This version is withdrawn.')).toBeVisible();
	await expect(reader.getByText(/The confirmation run was mislabelled\./)).toBeVisible();

	const study = await demoStudy(page);
	for (const path of [
		`${study}/scheme`,
		`${study}/data`,
		`${study}/fit`,
		`${study}/window`,
		new URL(recipe).pathname
	])
		expect((await reader.goto(path))?.status(), path).toBe(404);
});

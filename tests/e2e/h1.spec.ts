/** Story H1: from a scheme and a clean sheet to a signed, shared recipe and QA's workbook. Data: invented (HX-14). */
import { readFileSync } from 'node:fs';
import { expect, test, type Browser, type Page } from '@playwright/test';
import { recalculate } from '../integration/recalculate';
import { DEMO_PASSWORD, PEOPLE, signIn, watchConsole } from './support';
import {
	addSpecies,
	carryByKeyboard,
	confirmSheet,
	constantOf,
	dragStep,
	newStudy,
	saved,
	startFit,
	upload
} from './story';

/** A second run at the same temperature with another charge, invented: it confirms the fit of the first. */
const REPEAT = `Time (h),A (mol/L),B (mol/L),C (mol/L)
0.25,0.391,0.079,0.002
0.5,0.324,0.150,0.012
1,0.215,0.222,0.041
1.5,0.152,0.263,0.068
2,0.095,0.279,0.109
3,0.038,0.261,0.171
4,0.018,0.230,0.226
6,0.006,0.177,0.296
8,0.002,0.149,0.327
12,0.001,0.120,0.356
`;

async function as(browser: Browser, email: string): Promise<Page> {
	const page = await (await browser.newContext()).newPage();
	await signIn(page, email);
	return page;
}

async function sign(page: Page, meaning: string): Promise<void> {
	const dialog = page.getByRole('dialog');
	await dialog.getByLabel('Your password, once more').fill(DEMO_PASSWORD);
	await dialog.getByRole('button', { name: `Sign as ${meaning}` }).click();
	await expect(dialog).toBeHidden();
}

test('from a scheme dragged with the mouse to a recipe that a second person validates and a third group reads', async ({
	browser,
	page
}) => {
	test.setTimeout(240_000);
	const errors = watchConsole(page);
	await signIn(page, PEOPLE.chemist);
	const study = await newStudy(page, 'Story of the ring closure', 'hold time at 50 °C with B at its most', [
		{ species: 'A', relation: 'NMT', limit: '25' }
	]);
	await addSpecies(page, ['B', 'C']);
	await dragStep(page, 1, 'A', 'B');
	await dragStep(page, 2, 'B', 'C');
	await page.getByRole('button', { name: 'Step 2 runs one way' }).click();
	await saved(page);

	await upload(page, study, 'examples/hx14-run2-50C.csv');
	await confirmSheet(page, { celsius: '50', charge: { A: '0.5' } });
	await upload(page, study, { name: 'repeat.csv', mimeType: 'text/csv', buffer: Buffer.from(REPEAT) });
	await confirmSheet(page, { celsius: '50', charge: { A: '0.48' } });

	await page.goto(`/studies/${study}/fit`);
	await page.getByRole('checkbox', { name: /^Run 2/ }).uncheck();
	await startFit(page);
	// Figures of the story, computed for this invented data set: k1 0.794 ± 0.007, k2 0.297 ± 0.004, k−2 0.0952 ± 0.0030 1/h.
	for (const [step, estimate, standardError] of [
		['A → B', 0.794, 0.007],
		['B → C', 0.297, 0.004],
		['C → B', 0.0952, 0.003]
	] as const) {
		const found = await constantOf(page, step);
		expect(Math.abs(found.estimate - estimate), step).toBeLessThan(estimate * 0.002);
		expect(Math.abs(found.standardError - standardError), step).toBeLessThan(0.0006);
	}
	await expect(page.getByText(/33 values/).first()).toBeVisible();

	await page.getByRole('link', { name: 'Use in a window' }).click();
	await page.getByRole('button', { name: 'Find the times' }).click();
	await expect(page).toHaveURL(/\/window\/[0-9a-f-]{36}/);
	// B max 0.2857 mol/L at 2.13 h (story H1).
	await expect(page.getByRole('row', { name: /^B 2\.1/ })).toContainText(/0\.28/);
	await page.getByRole('link', { name: 'Use in a recipe' }).click();
	await page.getByLabel('Title').fill('Ring closure of the story');
	await page.getByRole('button', { name: 'Begin the draft' }).click();
	await expect(page).toHaveURL(/\/recipes\/[0-9a-f-]{36}/);
	const recipe = page.url();
	await page.getByLabel('Run to hold the kinetics against').selectOption({ index: 1 });
	await expect(page.getByText(/points lie inside the 95 % prediction band/)).toBeVisible();
	await saved(page);
	await page.getByRole('button', { name: 'Submit for review' }).click();
	await sign(page, 'authored');
	await expect(page.getByText('In review').first()).toBeVisible();
	await expect(page.getByRole('button', { name: 'Sign as validated' })).toHaveCount(0);
	expect(errors).toEqual([]);

	const lead = await as(browser, PEOPLE.lead);
	const leadErrors = watchConsole(lead);
	await lead.goto(recipe);
	await lead.getByRole('button', { name: 'Sign as validated' }).click();
	await sign(lead, 'validated');
	await expect(lead.getByText('Validated').first()).toBeVisible();
	await lead.getByRole('button', { name: 'Share with a group' }).click();
	const share = lead.getByRole('dialog');
	await share.getByLabel('Group').selectOption({ label: 'Pilot Hall' });
	await share.getByRole('button', { name: 'Share it' }).click();
	await expect(share).toBeHidden();
	expect(leadErrors).toEqual([]);

	const reader = await as(browser, PEOPLE.reader);
	await reader.getByRole('button', { name: /Kilo Lab/ }).click();
	await reader
		.getByRole('menuitem', { name: /Pilot Hall/ })
		.or(reader.getByRole('menuitemradio', { name: /Pilot Hall/ }))
		.click();
	await expect(reader.getByRole('button', { name: /Pilot Hall/ })).toBeVisible();
	await reader.goto('/shared');
	await reader
		.getByRole('link', { name: /Ring closure of the story/ })
		.first()
		.click();
	await expect(reader.getByRole('heading', { name: /Ring closure of the story/ }).first()).toBeVisible();
	await reader.goto(`/studies/${study}/scheme`);
	await expect(reader.getByRole('heading', { level: 1 })).toContainText(/not found/i);

	const admin = await as(browser, PEOPLE.admin);
	await admin.goto('/admin/mail');
	const mail = admin.getByRole('listitem').filter({ hasText: 'jonas.reyes@kilnlane.example' }).first();
	await expect(mail).not.toContainText(/Ring closure|0\.79/);

	const qa = await as(browser, PEOPLE.qa);
	await qa.goto(recipe);
	const [download] = await Promise.all([
		qa.waitForEvent('download'),
		qa.getByRole('link', { name: /workbook/i }).click()
	]);
	const book = await recalculate(readFileSync(await download.path()));
	expect(book.value('Cover', book.beside('Cover', 'All checks'))).toBe(true);
});

test('the same scheme is put together by keyboard alone', async ({ page }) => {
	const errors = watchConsole(page);
	await signIn(page, PEOPLE.chemist);
	await newStudy(page, 'Keyboard ring closure', 'hold time at 50 °C with B at its most');
	await addSpecies(page, ['A', 'B', 'C']);
	await carryByKeyboard(page, 'A', 'reactant of a new step');
	await carryByKeyboard(page, 'B', 'product of step 1');
	await carryByKeyboard(page, 'B', 'reactant of a new step');
	await carryByKeyboard(page, 'C', 'product of step 2');
	await page.getByRole('button', { name: 'Step 2 runs one way' }).press('Enter');
	await saved(page);
	await page.reload();
	await expect(page.getByRole('button', { name: 'Step 2 runs both ways' })).toBeVisible();
	await expect(page.getByRole('button', { name: 'C, product of step 2' })).toBeVisible();
	expect(errors).toEqual([]);
});

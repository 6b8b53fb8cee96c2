/** Story H2: a messy workbook becomes a run by questions answered, by mouse and by keyboard; and what is no sheet is refused. */
import { readFileSync } from 'node:fs';
import { expect, test, type Locator, type Page } from '@playwright/test';
import XlsxPopulate from 'xlsx-populate';
import { REVERSIBLE, studyWith } from './drawn';
import { PEOPLE, signIn, watchConsole } from './support';
import { cell, counts, giveConditions, MESSY, points } from './sheets';
import { constantOf, startFit, upload } from './story';

const finding = (page: Page, rule: string): Locator => page.locator(`[data-finding^="${rule}:50°C!"]`);

async function press(page: Page, rule: string, answer: string | RegExp): Promise<void> {
	await finding(page, rule).getByRole('button', { name: answer }).click();
}

test('a messy workbook: every question with its cell, corrections with their reason, the constants of the story', async ({
	page
}) => {
	test.setTimeout(120_000);
	const errors = watchConsole(page);
	await signIn(page, PEOPLE.chemist);
	const study = await studyWith(page, 'Messy workbook', REVERSIBLE);
	await upload(page, study, MESSY);
	await expect(counts(page)).toHaveText(/^2 stop · 7 ask · \d+ note$/);
	const make = page.getByRole('button', { name: /^Make run/ });
	await expect(make).toBeDisabled();
	await expect(page.getByText(/9 questions are open/)).toBeVisible();

	// A press on the cell of a finding shows it on the sheet; a press on the cell leads to the finding.
	await finding(page, 'B24').getByRole('button', { name: 'F20' }).click();
	await expect(cell(page, 'F20')).toHaveClass(/marked/);
	await expect(cell(page, 'F20')).toBeInViewport();
	await cell(page, 'A14').click();
	await expect(finding(page, 'B18')).toHaveClass(/active/);

	await press(page, 'B1', 'Yes, these rows');
	await press(page, 'B3', /mmol\/L/);
	await press(page, 'B18', /^Enter the time: 3:00$/);
	await press(page, 'B24', 'Leave as missing');
	await press(page, 'B5', /^Read as/);
	await press(page, 'B19', 'Separate samples: keep each row');
	await press(page, 'B8', 'Leave as missing');
	await press(page, 'B9', 'Not determined: leave as missing');
	await expect(counts(page)).toHaveText(/^0 stop · 1 ask/);
	await press(page, 'B10', 'Missing, or a retention time: leave as missing');
	await expect(counts(page)).toHaveText(/^0 stop · 0 ask/);
	await giveConditions(page);

	// A plain cell of the data is corrected as an overlay, with a reason; and taken back.
	await cell(page, 'E8').click();
	await cell(page, 'E8').click();
	const dialog = page.getByRole('dialog', { name: 'Cell E8' });
	await dialog.getByLabel('Read it as').fill('321');
	await dialog.getByLabel('Reason').fill('.');
	await expect(dialog.getByRole('button', { name: 'Correct it' })).toBeDisabled();
	await dialog.getByLabel('Reason').fill('Read again from the chromatogram.');
	await dialog.getByRole('button', { name: 'Correct it' }).click();
	await expect(cell(page, 'E8')).toHaveClass(/corrected/);
	await page.getByRole('button', { name: 'Undo', exact: true }).click();
	await expect(cell(page, 'E8')).not.toHaveClass(/corrected/);

	await expect(make).toBeEnabled();
	await make.click();
	await expect(page).toHaveURL(/\/data\/runs\//);
	await expect(page.getByText('50°C A14: “0:03” read as “3:00”')).toBeAttached();
	await expect(points(page).getByRole('row')).toHaveCount(15);

	await page.goto(`/studies/${study}/fit`);
	await startFit(page);
	// Constants of the story, computed for this invented data set: k1 0.796, k2 0.298, k−2 0.0957 1/h.
	for (const [step, k] of [
		['A → B', 0.796],
		['B → C', 0.298],
		['C → B', 0.0957]
	] as const)
		expect(Math.abs((await constantOf(page, step)).estimate / k - 1), step).toBeLessThan(0.01);
	expect(errors).toEqual([]);
});

test('the same questions are answered from the keyboard alone', async ({ page }) => {
	await signIn(page, PEOPLE.chemist);
	const study = await studyWith(page, 'Messy workbook by keyboard', REVERSIBLE);
	await upload(page, study, MESSY);
	// The group knows these headers from an earlier sheet: what it knows is not asked again.
	const asked = /\d+ ask/.exec(await counts(page).innerText())![0];
	await page.getByRole('button', { name: 'Next open question' }).focus();
	await page.keyboard.press('Enter');
	await expect(finding(page, 'B18').getByRole('button', { name: /^Enter the time/ })).toBeFocused();
	await page.keyboard.press('Space');
	await expect(counts(page)).toHaveText(/^1 stop/);
	await page.keyboard.press('ArrowDown');
	await expect(finding(page, 'B24')).toHaveClass(/active/);
	await expect(cell(page, 'F20')).toHaveClass(/marked/);
	const missing = finding(page, 'B24').getByRole('button', { name: 'Leave as missing' });
	for (let i = 0; i < 4 && !(await missing.evaluate((e) => e === document.activeElement)); i++)
		await page.keyboard.press('ArrowRight');
	await expect(missing).toBeFocused();
	await page.keyboard.press('Space');
	await expect(counts(page)).toHaveText(new RegExp(`^0 stop · ${asked}`));
	// Undo and redo belong to the answers as well, and what was answered is kept.
	await page.keyboard.press('Control+z');
	await expect(counts(page)).toHaveText(/^1 stop/);
	await page.keyboard.press('Control+Shift+z');
	await expect(counts(page)).toHaveText(/^0 stop/);
	await expect(page.getByRole('status').filter({ hasText: /^Saved/ })).toBeVisible();
	await page.reload({ waitUntil: 'networkidle' });
	await expect(counts(page)).toHaveText(new RegExp(`^0 stop · ${asked}`));
	// From a cell of the sheet to its question.
	const grid = page.getByRole('grid');
	await grid.focus();
	for (let i = 0; i < 40 && !/-E19$/.test((await grid.getAttribute('aria-activedescendant')) ?? ''); i++) {
		const at = /-([A-Z]+)(\d+)$/.exec((await grid.getAttribute('aria-activedescendant')) ?? '');
		await page.keyboard.press(at && at[2] === '19' ? 'ArrowRight' : 'ArrowDown');
	}
	await page.keyboard.press('Enter');
	await expect(finding(page, 'B10')).toHaveClass(/active/);
});

test('what is no sheet is refused in words, and the page goes on working', async ({ page }) => {
	const errors = watchConsole(page);
	await signIn(page, PEOPLE.chemist);
	const study = await studyWith(page, 'Refused files', REVERSIBLE);
	await page.goto(`/studies/${study}/data`, { waitUntil: 'networkidle' });
	const give = (name: string, buffer: Buffer) =>
		page.getByLabel('Assay sheet').setInputFiles({ name, mimeType: 'application/octet-stream', buffer });
	const png = Buffer.from(
		'iVBORw0KGgoAAAANSUhEUgAAAAEAAAABCAQAAAC1HAwCAAAAC0lEQVR42mNk+A8AAQUBAScY42YAAAAASUVORK5CYII=',
		'base64'
	);
	// An office document under a password is an OLE2 container, never a ZIP.
	const encrypted = Buffer.concat([
		Buffer.from('d0cf11e0a1b11ae1', 'hex'),
		Buffer.alloc(504),
		Buffer.from('EncryptedPackage', 'utf16le'),
		Buffer.alloc(992)
	]);
	const cut = readFileSync(MESSY).subarray(0, 3000);
	const zip = Buffer.from('504b0506' + '00'.repeat(18), 'hex');
	for (const [name, bytes, words] of [
		['picture.xlsx', png, /picture|image|PNG|not a workbook/i],
		['locked.xlsx', encrypted, /password|encrypted/i],
		['cut.xlsx', cut, /damaged|incomplete|end/i],
		['archive.zip', zip, /\.xlsx|workbook/i],
		['empty.csv', Buffer.alloc(0), /empty|nothing/i]
	] as const) {
		await give(name, bytes);
		const notice = page.locator('.notice', { hasText: `${name} was not taken.` });
		await expect(notice, name).toBeVisible();
		await expect(notice, name).toContainText(words);
	}
	await upload(page, study, 'tests/fixtures/s01_clean_50C.csv');
	await expect(page.getByText('The reader has nothing to ask about this table.')).toBeVisible();
	expect(errors.filter((e) => !/status of 4\d\d/.test(e))).toEqual([]);
});

test('pasted cells are read; the same file again is named; what is downloaded is byte for byte what came', async ({
	page
}) => {
	await signIn(page, PEOPLE.chemist);
	const study = await studyWith(page, 'Pasted and again', REVERSIBLE);
	await page.goto(`/studies/${study}/data`, { waitUntil: 'networkidle' });
	await page.evaluate(() => {
		const data = new DataTransfer();
		data.setData(
			'text/plain',
			'Time (h)\tA (mol/L)\tB (mol/L)\n0\t0.5\t0\n0.5\t0.34\t0.14\n1\t0.23\t0.22\n2\t0.1\t0.28\n'
		);
		document.body.dispatchEvent(new ClipboardEvent('paste', { clipboardData: data, bubbles: true }));
	});
	await expect(page).toHaveURL(/\/data\/sheets\//);
	await expect(page.getByRole('heading', { name: /pasted-table\.txt/ })).toBeVisible();

	await upload(page, study, MESSY);
	const first = page.url();
	const [file] = await Promise.all([
		page.waitForEvent('download'),
		page.getByRole('link', { name: 'Download', exact: true }).click()
	]);
	expect(file.suggestedFilename()).toBe('s02_messy.xlsx');
	expect(readFileSync(await file.path()).equals(readFileSync(MESSY))).toBe(true);

	await upload(page, study, MESSY);
	await expect(page.getByText(/already read as/i).first()).toBeVisible();
	expect(page.url()).toBe(first);
});

test('the template workbook of the scheme comes filled with its columns and reads back without a question', async ({
	page
}) => {
	await signIn(page, PEOPLE.chemist);
	const study = await studyWith(page, 'Template workbook', REVERSIBLE);
	await page.goto(`/studies/${study}/data`, { waitUntil: 'networkidle' });
	const [file] = await Promise.all([
		page.waitForEvent('download'),
		page.getByRole('link', { name: 'Template workbook' }).click()
	]);
	const buffer = readFileSync(await file.path());
	const book = await XlsxPopulate.fromDataAsync(buffer);
	const header = book.sheet(0).usedRange()!.value()[2];
	expect(header.slice(0, 4)).toEqual(['Time', 'HX-14 (A)', 'HX-14b (B)', 'lactone (C)']);
	await upload(page, study, { name: 'template.xlsx', mimeType: 'application/octet-stream', buffer });
	await expect(counts(page)).toHaveText(/^0 stop · 0 ask/);
});

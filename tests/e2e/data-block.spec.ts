/** The sheet as received: which block counts as the data, cells read otherwise, the way through findings, and very long sheets. */
import { expect, test, type Locator, type Page } from '@playwright/test';
import { cell, counts, csv, giveConditions, makeRun, openSheet, points } from './sheets';

/** First order, rounded; invented. */
const valueAt = (t: number): [string, string] => {
	const a = 0.5 * Math.exp(-0.4 * t);
	return [a.toFixed(3), (0.5 - a).toFixed(3)];
};
const rows = (count: number, hours = 0.5): string[] =>
	Array.from({ length: count }, (_, i) => [String(i * hours), ...valueAt(i * hours)].join(','));
const HEAD = 'Time (h),A (mol/L),B (mol/L)';

const grip = (page: Page, edge: string): Locator =>
	page.getByRole('button', { name: new RegExp(`^${edge}:`) });
const isNow = (page: Page, edge: string, words: string) =>
	expect(grip(page, edge)).toHaveAccessibleName(new RegExp(`now ${words}\\.`));

test('the block of data is moved by its grips, with the mouse and with the keys', async ({ page }) => {
	await openSheet(page, 'Edges of the data', csv('block.csv', [HEAD, ...rows(9)]));
	const whole = 'rows 2 to 10, columns A to C';
	await isNow(page, 'Last row of the data', whole);

	// Two rows up with the mouse; Escape in the middle of a drag puts it back.
	const drag = async (down: number, end: 'drop' | 'Escape') => {
		const box = (await grip(page, 'Last row of the data').boundingBox())!;
		const [x, y] = [box.x + box.width / 2, box.y + box.height / 2];
		await page.mouse.move(x, y);
		await page.mouse.down();
		await page.mouse.move(x, y + down / 2, { steps: 4 });
		await page.mouse.move(x, y + down, { steps: 4 });
		if (end === 'Escape') await page.keyboard.press('Escape');
		await page.mouse.up();
	};
	await drag(-78, 'Escape');
	await isNow(page, 'Last row of the data', whole);
	await drag(-78, 'drop');
	await isNow(page, 'Last row of the data', 'rows 2 to 8, columns A to C');
	await expect(cell(page, 'A10')).toHaveClass(/aside/);

	// One row down from above, and a column away from the right, by keys; the column comes back as it was proposed.
	await grip(page, 'First row of the data').focus();
	await page.keyboard.press('ArrowDown');
	await isNow(page, 'First row of the data', 'rows 3 to 8, columns A to C');
	const chips = page.getByRole('group', { name: 'What the columns hold' });
	await expect(chips.getByRole('button', { name: 'C: B, mol/L' })).toBeVisible();
	await grip(page, 'Last column of the table').focus();
	await page.keyboard.press('ArrowLeft');
	await expect(chips.getByRole('button', { name: /^C:/ })).toHaveCount(0);
	await page.keyboard.press('ArrowRight');
	await expect(chips.getByRole('button', { name: 'C: B, mol/L' })).toBeVisible();
	await isNow(page, 'Last column of the table', 'rows 3 to 8, columns A to C');

	// The run holds what the block holds.
	await giveConditions(page);
	for (const ask of await page.locator('.finding:not(.settled):not(.note) .options').all())
		await ask.getByRole('button').first().click();
	await expect(counts(page)).toHaveText(/^0 stop · 0 ask/);
	await makeRun(page);
	await expect(points(page).locator('tbody tr')).toHaveCount(6);
	await expect(points(page).locator('tbody th').first()).toHaveText('0.5');
});

test('a corrected cell shows both values, who and why; the file keeps its own', async ({ page }) => {
	await openSheet(page, 'Corrected cell', csv('corrected.csv', [HEAD, ...rows(9)]));
	const [was] = valueAt(1);
	await cell(page, 'B4').click();
	await cell(page, 'B4').click();
	const dialog = page.getByRole('dialog', { name: 'Cell B4' });
	await expect(dialog.getByText(`On the sheet: ${was}`)).toBeVisible();
	await dialog.getByLabel('Read it as').fill('0.353');
	await dialog.getByLabel('Reason').fill('Digits changed places in the notebook.');
	await dialog.getByRole('button', { name: 'Correct it' }).click();
	await expect(cell(page, 'B4')).toHaveText('0.353');
	await expect(cell(page, 'B4')).toHaveAttribute(
		'title',
		new RegExp(`On the sheet “${was}”, read as “0\\.353”`)
	);
	const line = page.getByTestId('cell-line');
	await expect(line).toContainText(`read as “0.353”, on the sheet “${was}”`);
	await expect(line).toContainText('Digits changed places in the notebook., Mira Okafor');
	const list = page.locator('section', { hasText: 'Corrected cells' }).last();
	await expect(list).toContainText('Digits changed places');

	// The same overlay, and nothing else, is on the record of the run.
	await giveConditions(page);
	await makeRun(page);
	await expect(points(page).getByRole('button', { name: /^A at 1 h: 0\.353/ })).toBeVisible();
	await expect(page.getByText('Digits changed places in the notebook.')).toBeVisible();
	await page.goBack();
	await expect(counts(page)).toHaveText(/stop/);
	await cell(page, 'B4').click();
	await cell(page, 'B4').click();
	await dialog.getByRole('button', { name: 'Take the correction back' }).click();
	await expect(cell(page, 'B4')).toHaveText(was);
	await expect(cell(page, 'B4')).not.toHaveClass(/corrected/);
});

test('the keyboard goes from open question to open question, and the sheet goes along', async ({ page }) => {
	const long = rows(600, 0.05);
	long[18] = long[18].replace(/,[^,]*$/, ',n.d.');
	long[548] = long[548].replace(/^([^,]*),[^,]*/, '$1,tr');
	await openSheet(page, 'Far apart', csv('far.csv', [HEAD, ...long]));
	await expect(counts(page)).toHaveText(/^0 stop · 2 ask/);
	const next = page.getByRole('button', { name: 'Next open question' });
	const stands = async (address: string) => {
		await expect(cell(page, address)).toBeInViewport();
		await expect(cell(page, address)).toHaveClass(/ask.*marked/);
	};
	await next.focus();
	await page.keyboard.press('Enter');
	const first = (await page.locator('.finding.active').getAttribute('data-finding'))!;
	const [near, far] = /B9/.test(first) ? ['C20', 'B550'] : ['B550', 'C20'];
	await stands(near);
	await page.keyboard.press('ArrowDown');
	await stands(far);
	await expect(cell(page, near)).toHaveCount(0);
	await page.keyboard.press('ArrowUp');
	await stands(near);
	// Round again: after the last one comes the first.
	await next.focus();
	await page.keyboard.press('Enter');
	await stands(far);
	await next.focus();
	await page.keyboard.press('Enter');
	await stands(near);
	await expect(page.locator('.finding.active .options button').first()).toBeFocused();
});

test('twenty thousand rows scroll to their end, by wheel and by key, with the right row in every place', async ({
	page
}) => {
	test.setTimeout(120_000);
	const count = 20_000;
	const long = Array.from(
		{ length: count },
		(_, i) => `${(i * 0.001).toFixed(3)},${400 - i * 0.01},${i * 0.01}`
	);
	await openSheet(page, 'Twenty thousand rows', csv('long.csv', ['Time (h),A (mmol/L),B (mmol/L)', ...long]));
	// The reader works beside the page, not in its way.
	expect(page.workers().filter((w) => /reader\.worker/.test(w.url()))).toHaveLength(1);
	const grid = page.getByRole('grid');
	await expect(grid).toHaveAttribute('aria-rowcount', String(count + 2));
	const scroll = (share: number) =>
		grid.evaluate((box, at) => {
			box.scrollTop = at * (box.scrollHeight - box.clientHeight);
		}, share);
	await scroll(1);
	await expect(cell(page, 'A20001')).toHaveText('19.999');
	await cell(page, 'A20001').scrollIntoViewIfNeeded();
	await expect(cell(page, 'A20001')).toBeInViewport();
	await expect(cell(page, 'A2')).toHaveCount(0);
	await scroll(0.5);
	const middle = page.locator('[role="gridcell"][id*="-A100"]').first();
	await expect(middle).toBeVisible();
	const [, row] = /-A(\d+)$/.exec((await middle.getAttribute('id'))!)!;
	await expect(middle).toHaveText(((Number(row) - 2) * 0.001).toFixed(3));
	expect(await page.getByRole('gridcell').count()).toBeLessThan(400);
	await cell(page, `A${row}`).click();
	await page.keyboard.press('Control+End');
	await expect(grid).toHaveAttribute('aria-activedescendant', /-A20001$/);
	await expect(cell(page, 'A20001')).toBeInViewport();
	await page.keyboard.press('Control+Home');
	await expect(cell(page, 'A1')).toHaveText('Time (h)');
	// What is typed stands in the field at once, whatever the reader is about.
	const temperature = page.getByRole('textbox', { name: 'Temperature', exact: true });
	await temperature.pressSequentially('50.25');
	await expect(temperature).toHaveValue('50.25');
});

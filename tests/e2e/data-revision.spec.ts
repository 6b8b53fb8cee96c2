/** What comes after a run was made: a row found by its residual, a changed file, another temperature, points left out. */
import { readFileSync } from 'node:fs';
import { expect, test } from '@playwright/test';
import { REVERSIBLE, studyWith } from './drawn';
import { PEOPLE, signIn, watchConsole } from './support';
import { CLEAN, csv, giveConditions, makeRun, openSheet, points } from './sheets';
import { startFit, upload } from './story';

const clean = readFileSync(CLEAN, 'utf8').trim().split(/\r?\n/);
/** The clean run with two digits of A at 2 h in the wrong order. */
const wrong = clean.map((line) => line.replace(/^2,([^,]*)/, '2,0.301'));
const [, right] = /^2,([^,]*)/m.exec(clean.join('\n'))!;

test('a typing error is found by its residual, mended in a new file, and becomes a revision that marks the fit', async ({
	page
}) => {
	test.setTimeout(120_000);
	const errors = watchConsole(page);
	const study = await openSheet(page, 'Mended file', csv('kinetics.csv', wrong));
	await giveConditions(page);
	await makeRun(page);
	const run = page.url();
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await startFit(page);

	// From the residual that lies far out to the row of the run, which is lit.
	const sheetRow = wrong.findIndex((line) => line.startsWith('2,')) + 1;
	const far = page.locator(`a[href*="/data/runs/"][href$="#row-${sheetRow}"]`).first();
	await expect(far).toHaveAccessibleName(/2 h/);
	await far.scrollIntoViewIfNeeded();
	await far.click();
	await expect(page).toHaveURL(new RegExp(`/data/runs/.*#row-${sheetRow}$`));
	const row = points(page).locator(`#row-${sheetRow}`);
	await expect(row).toHaveClass(/lit/);
	await expect(row).toBeInViewport();
	await expect(row).toBeFocused();
	await expect(row.getByRole('rowheader')).toHaveText('2');

	// The changed file: what differs, cell by cell, and what it does to the fit, before anything is done.
	await upload(page, study, csv('kinetics.csv', clean));
	await giveConditions(page);
	await expect(page.getByText('Run 1 was made of a file of the same name.')).toBeVisible();
	await page.getByRole('button', { name: 'Changed file of a run …' }).click();
	const dialog = page.getByRole('dialog', { name: 'A new revision of run 1' });
	await expect(dialog.getByText('1 cell differs from kinetics.csv')).toBeVisible();
	const change = dialog.getByRole('region', { name: 'Cells that differ' }).getByRole('row').nth(1);
	await expect(change).toContainText(`B${sheetRow}`);
	await expect(change.getByRole('cell').nth(0)).toContainText('0.301');
	await expect(change.getByRole('cell').nth(1)).toContainText(right);
	await expect(dialog.getByText('Will be marked as resting on an older revision:')).toBeVisible();
	await expect(dialog.getByRole('link', { name: 'fit 1' })).toBeVisible();
	const make = dialog.getByRole('button', { name: 'Make the revision' });
	await dialog.getByLabel('Reason for the change').fill('new');
	await expect(make).toBeDisabled();
	await dialog.getByLabel('Reason for the change').fill('Two digits of A at 2 h had changed places.');
	await make.click();
	await expect(page).toHaveURL(run);
	await expect(page.getByText('revision 2', { exact: true }).first()).toBeVisible();
	await expect(points(page).getByRole('button', { name: new RegExp(`^A at 2 h: ${right}`) })).toBeVisible();
	await expect(page.getByText('Two digits of A at 2 h had changed places.')).toBeVisible();
	await expect(
		page.locator('.notice', { hasText: 'Fits rest on an older revision of this run.' })
	).toContainText('fit 1 (revision 1)');
	await page.getByRole('link', { name: 'Fit 1', exact: true }).click();
	await expect(page.getByText(/superseded/i).first()).toBeVisible();
	expect(errors).toEqual([]);
});

test('an address of a row lights it in a run of thousands of rows, and one that is none does nothing', async ({
	page
}) => {
	test.setTimeout(120_000);
	const long = Array.from(
		{ length: 3000 },
		(_, i) => `${(i * 0.01).toFixed(2)},${(0.5 - i * 1e-4).toFixed(4)},${(i * 1e-4).toFixed(4)}`
	);
	await openSheet(page, 'Long run', csv('long-run.csv', ['Time (h),A (mol/L),B (mol/L)', ...long]));
	await giveConditions(page);
	for (const ask of await page.locator('.finding:not(.settled):not(.note) .options').all())
		await ask.getByRole('button').first().click();
	await makeRun(page);
	const run = page.url();
	await page.goto(`${run}#row-2502`, { waitUntil: 'networkidle' });
	const row = page.locator('#row-2502');
	await expect(row).toBeInViewport();
	await expect(row).toHaveClass(/lit/);
	await expect(row.getByRole('rowheader')).toHaveText('25');
	await expect(points(page).getByRole('table')).toHaveAttribute('aria-rowcount', '3001');
	expect(await points(page).locator('tbody tr').count()).toBeLessThan(80);
	await page.goto(`${run}#row-9999`, { waitUntil: 'networkidle' });
	await expect(points(page).locator('.lit')).toHaveCount(0);
});

test('a log that leaves the stated temperature is proposed as the program; a person decides, and decides anew with a reason', async ({
	page
}) => {
	const temperatures = [50, 50.1, 49.9, 50.2, 57.3, 55.0, 51.2, 50.1, 50.0, 50.0, 49.9, 50.1];
	const lines = clean.map((line, i) => `${line},${i === 0 ? 'T (°C)' : temperatures[i - 1]}`);
	await openSheet(page, 'Logged run', csv('logged.csv', lines));
	await giveConditions(page);
	const choice = page.getByRole('group', { name: 'In fits counts' });
	await expect(choice.getByText(/The log of 12 readings goes from 49\.9 to 57\.3 °C/)).toBeVisible();
	await expect(choice.getByRole('radio', { name: /^the measured log/ })).toBeChecked();
	await choice.getByRole('radio', { name: /^the stated temperature/ }).check();
	await makeRun(page);
	const card = page.locator('section', { hasText: 'Temperature of the run' }).first();
	await expect(card.getByText('stated temperature counts in fits')).toBeVisible();
	await card.getByRole('button', { name: 'Use the log as the program …' }).click();
	const dialog = page.getByRole('dialog', { name: 'Use the measured log in fits' });
	await expect(dialog.getByRole('button', { name: 'Make the revision' })).toBeDisabled();
	await dialog.getByLabel('Reason for the change').fill('The bath was off for twenty minutes.');
	await dialog.getByRole('button', { name: 'Make the revision' }).click();
	await expect(dialog).toBeHidden();
	await expect(card.getByText('log is the program in fits')).toBeVisible();
	await expect(page.getByText('revision 2', { exact: true }).first()).toBeVisible();
	await expect(page.getByText('The bath was off for twenty minutes.')).toBeVisible();
});

test('a point is left out with a reason and used again with another; both stay in sight', async ({
	page
}) => {
	await signIn(page, PEOPLE.chemist);
	const study = await studyWith(page, 'Points left out', REVERSIBLE);
	await upload(page, study, CLEAN);
	await giveConditions(page);
	await makeRun(page);
	await points(page)
		.getByRole('button', { name: /^A at 2 h/ })
		.click();
	const dialog = page.getByRole('dialog');
	await expect(dialog.getByRole('button', { name: 'Leave it out' })).toBeDisabled();
	await dialog.getByLabel('Kind of reason').selectOption('sampling error');
	await dialog.getByLabel('Reason', { exact: true }).fill('.');
	await dialog.getByRole('button', { name: 'Leave it out' }).click();
	await expect(dialog.getByRole('alert').or(dialog.locator('.notice.refusal'))).toBeVisible();
	await dialog.getByLabel('Reason', { exact: true }).fill('The vial was not closed.');
	await dialog.getByRole('button', { name: 'Leave it out' }).click();
	await expect(dialog).toBeHidden();
	const out = points(page).getByRole('button', { name: /^A at 2 h.*left out: The vial was not closed/ });
	await expect(out).toBeVisible();
	await expect(page.getByText(/revision 2/i).first()).toBeVisible();

	await out.click();
	await dialog.getByLabel('Reason', { exact: true }).fill('The second vial of the sample agrees.');
	await dialog.getByRole('button', { name: 'Use it again' }).click();
	await expect(dialog).toBeHidden();
	await expect(out).toHaveCount(0);
	await expect(page.getByText(/revision 3/i).first()).toBeVisible();
	await expect(page.getByText(/The vial was not closed/).first()).toBeVisible();
});

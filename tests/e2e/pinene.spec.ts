/**
 * Thermal isomerisation of alpha-pinene at 189.5 °C through the browser.
 * Data: R. E. Fuguitt and J. E. Hawkins, J. Am. Chem. Soc. 69 (1947) 319. Constants and sum of squares: G. E. P. Box et al.,
 * Technometrics 15 (1973) 33, and E. D. Dolan et al., COPS 3.0, ANL/MCS-TM-273 (2004); see tests/reference.
 */
import { readFileSync } from 'node:fs';
import { expect, test } from '@playwright/test';
import XlsxPopulate from 'xlsx-populate';
import { PEOPLE, signIn, watchConsole } from './support';
import { addSpecies, confirmSheet, constantOf, dragStep, newStudy, saved, startFit, upload } from './story';

interface Reference {
	data: { times: number[]; observations: number[][] };
}
const reference = JSON.parse(readFileSync('tests/reference/c01_alpha_pinene_189C.json', 'utf8')) as Reference;
const SYMBOLS = ['P', 'D', 'O', 'Y', 'M'];

async function workbook(): Promise<Buffer> {
	const book = await XlsxPopulate.fromBlankAsync();
	const sheet = book.sheet(0).name('189.5 °C');
	sheet.cell('A1').value([['Time (min)', ...SYMBOLS.map((s) => `${s} (% of charge)`)]]);
	reference.data.times.forEach((time, i) =>
		sheet.cell(i + 2, 1).value([[time, ...reference.data.observations[i]]])
	);
	return await book.outputAsync();
}

test('the table of Fuguitt and Hawkins gives the published constants', async ({ page }) => {
	test.setTimeout(180_000);
	const errors = watchConsole(page);
	await signIn(page, PEOPLE.chemist);
	const study = await newStudy(
		page,
		'Alpha-pinene, published data',
		'whether the published constants come back'
	);
	await addSpecies(page, SYMBOLS);
	await dragStep(page, 1, 'P', 'D');
	await dragStep(page, 2, 'P', 'O');
	await dragStep(page, 3, 'O', 'Y');
	await dragStep(page, 4, 'O', 'M');
	await page.getByRole('button', { name: 'Step 4 runs one way' }).click();
	await saved(page);
	const type = 'application/vnd.openxmlformats-officedocument.spreadsheetml.sheet';
	await upload(page, study, { name: 'pinene.xlsx', mimeType: type, buffer: await workbook() });
	await confirmSheet(page, { celsius: '189.5', charge: { P: '100' }, chargeUnit: '%' });
	await page.goto(`/studies/${study}/fit`);
	await startFit(page);
	const perHour = (perMinute: number) => perMinute * 60;
	for (const [step, published] of [
		['P → D', 5.93e-5],
		['P → O', 2.96e-5],
		['O → Y', 2.05e-5],
		['O → M', 27.4e-5],
		['M → O', 4.0e-5]
	] as const) {
		const { estimate } = await constantOf(page, step);
		expect(estimate / perHour(published), step).toBeCloseTo(1, 2);
	}
	await expect(page.getByText(/weighted sum of squares 19\.87/)).toBeVisible();
	expect(errors).toEqual([]);
});

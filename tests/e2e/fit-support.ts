/** What the stories of the fit station share. */
import type { Page } from '@playwright/test';
import { REVERSIBLE, studyWith } from './drawn';
import { confirmSheet, upload } from './story';
import { PEOPLE, signIn } from './support';

export const SHEETS = { clean: 'tests/fixtures/s01_clean_50C.csv', hidden: 'tests/fixtures/s09_autocat.csv' };

/** A study of the invented reaction with one run at 50 °C. */
export async function studyOf(
	page: Page,
	name: string,
	sheet: Parameters<typeof upload>[2]
): Promise<string> {
	await signIn(page, PEOPLE.chemist);
	const study = await studyWith(page, name, REVERSIBLE);
	await upload(page, study, sheet);
	await confirmSheet(page, { celsius: '50', charge: { 'A, HX-14': '0.5' } });
	return study;
}

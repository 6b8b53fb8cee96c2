/** A fit under way: long work that may be left, found again and called off. */
import { expect, test, type Page } from '@playwright/test';
import { expectAccessible } from './accessibility';
import { studyOf } from './fit-support';
import { watchConsole } from './support';

/** The newest fit begun with a search wide enough to be watched. */
async function startLongFit(page: Page, study: string): Promise<string> {
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await page.getByText('Charges, energies, error model, search').click();
	await page.getByLabel('Starting points').fill('500');
	await page.getByLabel('Seed of the search').fill(String(1 + (Date.now() % 100_000)));
	await page.getByRole('button', { name: 'Start the fit' }).click();
	await expect(page).toHaveURL(/\/fit\/[0-9a-f-]{36}/);
	return page.url();
}

/** Readings of a probe every few seconds, made up: enough of them to keep a wide search busy for a while. */
function probeSheet(): Buffer {
	const lines = ['Time (h),A (mol/L),B (mol/L),C (mol/L)'];
	for (let i = 1; i <= 3000; i++) {
		const t = i / 250;
		const a = 0.5 * Math.exp(-0.8 * t) + 0.004 * Math.sin(12.9898 * i);
		const b =
			0.5 * (1 - Math.exp(-0.8 * t)) * (0.25 + 0.75 * Math.exp(-0.4 * t)) + 0.004 * Math.sin(78.233 * i);
		lines.push([t, a, b, 0.5 - a - b].map((x) => Math.max(x, 0.0004).toFixed(5)).join(','));
	}
	return Buffer.from(lines.join('\n'));
}

test('a long fit shows its progress, goes on while the page is left, and is cancelled on the record', async ({
	page
}) => {
	const errors = watchConsole(page);
	const study = await studyOf(page, 'A long search', {
		name: 'probe.csv',
		mimeType: 'text/csv',
		buffer: probeSheet()
	});
	const fit = await startLongFit(page, study);
	const bar = page.getByRole('progressbar');
	await expect(bar).toBeVisible();
	await expect(page.getByText(/% of the work/)).toBeVisible();
	await expectAccessible(page, 'a running fit');
	await page.goto('/studies');
	await page.goto(`/studies/${study}/fit`, { waitUntil: 'networkidle' });
	await expect(
		page
			.getByRole('row')
			.filter({ hasText: /running|waiting/i })
			.first()
	).toBeVisible();
	await page.goto(fit, { waitUntil: 'networkidle' });
	await expect(bar).toBeVisible();
	await page.getByRole('button', { name: 'Cancel', exact: true }).click();
	await expect(page.getByText('The fit was cancelled')).toBeVisible();
	await page.goto(`/studies/${study}/fit`);
	await expect(page.getByRole('row').filter({ hasText: /cancelled/i })).toHaveCount(1);
	expect(errors).toEqual([]);
});

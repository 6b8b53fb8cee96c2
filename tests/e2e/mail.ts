/** Mail that the service sends, read where the demonstration keeps it. */
import { expect, type Page } from '@playwright/test';

/** Takes the group with this name as the current one. */
export async function chooseGroup(page: Page, name: string): Promise<void> {
	const chosen = page.getByRole('button', { name: `Group: ${name}` });
	await expect(page.getByRole('button', { name: /^Group: / })).toBeVisible();
	if (await chosen.isVisible()) return;
	await page.getByRole('button', { name: /^Group: / }).click();
	await page.getByRole('menuitemradio', { name }).click();
	await expect(chosen).toBeVisible();
}

export async function sendInvitation(lead: Page, email: string): Promise<void> {
	await lead.goto('/group', { waitUntil: 'networkidle' });
	await chooseGroup(lead, 'Route Development');
	await lead.goto('/group', { waitUntil: 'networkidle' });
	await lead.getByLabel('E-mail address').fill(email);
	await lead.getByRole('button', { name: 'Send the invitation' }).click();
	await expect(lead.getByText(`An invitation is on its way to ${email}.`)).toBeVisible();
}

export async function sendReset(page: Page, email: string): Promise<void> {
	await page.goto('/reset', { waitUntil: 'networkidle' });
	await page.getByLabel('E-mail address').fill(email);
	await page.getByRole('button', { name: 'Send the link' }).click();
	await expect(page.getByText('Look into your mail.')).toBeVisible();
}

/** Link of the newest mail to an address, as the site's admin finds it. */
export async function linkMailedTo(admin: Page, email: string): Promise<string> {
	await admin.goto('/admin/mail');
	const mail = admin.getByRole('listitem').filter({ hasText: `to ${email}` });
	return (await mail.first().getByRole('link').getAttribute('href'))!;
}

import AxeBuilder from '@axe-core/playwright';
import { expect, test, type Browser, type Page } from '@playwright/test';
import { PEOPLE, signIn, watchConsole } from './support';

const PHRASE = 'walks along the river';

async function freshPage(browser: Browser, options: { javaScriptEnabled?: boolean } = {}): Promise<Page> {
	return (await browser.newContext(options)).newPage();
}

/** A group lead in the group that they lead; they are a member of another one too. */
async function signInAsLead(page: Page): Promise<void> {
	await signIn(page, PEOPLE.lead);
	const chosen = page.getByRole('button', { name: 'Group: Route Development' });
	if (await chosen.isVisible()) return;
	await page.getByRole('button', { name: /^Group: / }).click();
	await page.getByRole('menuitemradio', { name: /Route Development/ }).click();
	await expect(chosen).toBeVisible();
}

/** Invites by the group's page and reads the link from the demonstration's mailbox, as its admin may. */
async function invitationFor(browser: Browser, email: string): Promise<string> {
	const lead = await freshPage(browser);
	await signInAsLead(lead);
	await lead.goto('/group');
	await lead.getByLabel('E-mail address').fill(email);
	await lead.getByRole('button', { name: 'Send the invitation' }).click();
	await expect(lead.getByText(`An invitation is on its way to ${email}.`)).toBeVisible();
	await lead.context().close();
	return linkMailedTo(browser, email);
}

async function linkMailedTo(browser: Browser, email: string): Promise<string> {
	const admin = await freshPage(browser);
	await signIn(admin, PEOPLE.admin);
	await admin.goto('/admin/mail');
	const mail = admin.getByRole('listitem').filter({ hasText: `to ${email}` });
	const link = await mail.first().getByRole('link').getAttribute('href');
	await admin.context().close();
	return link!;
}

test('signed-out people are sent to sign in, and come back to the page that they asked for', async ({
	page
}) => {
	await page.goto('/records?objectType=study');
	await expect(page).toHaveURL(/\/sign-in\?next=/);
	await page.getByLabel('E-mail address').fill(PEOPLE.qa);
	await page.getByLabel('Password').fill('not the password');
	await page.getByRole('button', { name: 'Sign in' }).click();
	await expect(page.getByRole('alert')).toHaveText(/do not belong together/);
	await page.getByLabel('Password').fill('amber-glass-demo');
	await page.getByRole('button', { name: 'Sign in' }).click();
	await expect(page).toHaveURL(/\/records\?objectType=study$/);
});

test('signing in, changing a role and signing out work without scripts', async ({ browser }) => {
	const page = await freshPage(browser, { javaScriptEnabled: false });
	await page.goto('/sign-in?next=/group');
	await page.getByLabel('E-mail address').fill(PEOPLE.lead);
	await page.getByLabel('Password').fill('not the password');
	await page.getByRole('button', { name: 'Sign in' }).click();
	await expect(page.getByText('do not belong together')).toBeVisible();
	await page.getByLabel('Password').fill('amber-glass-demo');
	await page.getByRole('button', { name: 'Sign in' }).click();
	await expect(page).toHaveURL(/\/group$/);
	await page.goto('/sign-out');
	await page.getByRole('button', { name: 'Sign out', exact: true }).last().click();
	await expect(page).toHaveURL(/\/sign-in\?notice=signed-out$/);
	await page.goto('/group');
	await expect(page).toHaveURL(/\/sign-in/);
});

test('an invited person joins by the mailed link, once, and can be given another role', async ({
	browser,
	page
}) => {
	const email = 'vic.visitor@kilnlane.example';
	const link = await invitationFor(browser, email);
	const console = watchConsole(page);
	await page.goto(link);
	await page.getByRole('button', { name: 'Accept the invitation' }).click();
	await expect(page.getByText('Enter the name as it shall be printed')).toBeVisible();
	await expect(page.getByText('Use at least 12 characters')).toBeVisible();
	await page.getByLabel('Your name').fill('Vic Visitor');
	await page.getByLabel('Password', { exact: true }).fill(PHRASE);
	await page.getByLabel('Password, once more').fill(PHRASE);
	await page.getByRole('button', { name: 'Accept the invitation' }).click();
	await expect(page).toHaveURL(/\/studies$/);
	expect(console).toEqual([]);

	const other = await freshPage(browser);
	await other.goto(link);
	await expect(other.getByRole('heading', { name: 'This link no longer works' })).toBeVisible();

	await signInAsLead(other);
	await other.goto('/group');
	const row = other.getByRole('listitem').filter({ hasText: email });
	await row.getByText('Change or take out').click();
	await row.getByLabel('Role').selectOption('reader');
	await row.getByLabel(/Reason/).fill('visits the pilot plant only');
	await row.getByRole('button', { name: 'Change the role' }).click();
	await expect(row.getByText('The role is changed.')).toBeVisible();
	// The role holds from the next request on.
	expect((await page.goto('/studies/new'))?.status()).toBe(404);
});

test('a new password by mail ends every other session', async ({ browser, page }) => {
	const email = 'rhea.resetter@kilnlane.example';
	await page.goto(await invitationFor(browser, email));
	await page.getByLabel('Your name').fill('Rhea Resetter');
	await page.getByLabel('Password', { exact: true }).fill(PHRASE);
	await page.getByLabel('Password, once more').fill(PHRASE);
	await page.getByRole('button', { name: 'Accept the invitation' }).click();
	await expect(page).toHaveURL(/\/studies$/);

	const other = await freshPage(browser);
	await other.goto('/reset');
	await other.getByLabel('E-mail address').fill(email);
	await other.getByRole('button', { name: 'Send the link' }).click();
	await expect(other.getByText('Look into your mail.')).toBeVisible();
	await other.goto(await linkMailedTo(browser, email));
	await other.getByLabel('New password', { exact: true }).fill('runs along the river');
	await other.getByLabel('New password, once more').fill('runs along the river');
	await other.getByRole('button', { name: 'Set the password' }).click();
	await expect(other.getByText('The new password is set.')).toBeVisible();
	await signIn(other, email, 'runs along the river');
	await page.goto('/account');
	await expect(page).toHaveURL(/\/sign-in/);
});

test('a token is shown once, works for the API within its scopes, and ends when revoked', async ({
	page,
	request
}) => {
	await signIn(page, PEOPLE.qa);
	await page.goto('/account');
	await page.getByLabel('What uses it').fill('trail reader');
	await page.getByRole('button', { name: 'Make a token' }).click();
	const token = await page.locator('code', { hasText: /^rw_/ }).innerText();
	const call = (path: string) => request.get(path, { headers: { authorization: `Bearer ${token}` } });
	expect((await call('/api/v1/audit?limit=1')).status()).toBe(200);
	await page.reload();
	await expect(page.getByText(token)).toHaveCount(0);
	await page.getByRole('button', { name: 'Revoke trail reader' }).click();
	await expect(page.getByRole('button', { name: 'Revoke trail reader' })).toHaveCount(0);
	const refused = await call('/api/v1/audit?limit=1');
	expect(refused.status()).toBe(401);
	expect(refused.headers()['content-type']).toBe('application/problem+json');
});

test('QA reads, filters, exports and verifies the audit trail', async ({ page }) => {
	await signIn(page, PEOPLE.qa);
	await page.goto('/records');
	await page.getByRole('button', { name: 'Verify the trail' }).click();
	await expect(page.getByText('The chain is unbroken.')).toBeVisible();
	await page.getByLabel('Person').fill('Adeyemi');
	await page.getByRole('button', { name: 'Filter' }).click();
	await expect(page).toHaveURL(/person=Adeyemi/);
	await expect(page.locator('#main ol > li').first()).toContainText('Tunde Adeyemi');
	const [file] = await Promise.all([
		page.waitForEvent('download'),
		page.getByRole('link', { name: 'Export as CSV' }).click()
	]);
	expect(file.suggestedFilename()).toMatch(/^audit-trail-\d{4}-\d\d-\d\d\.csv$/);
});

test('chemists have no records page and nobody but an admin has the administration', async ({ page }) => {
	await signIn(page, PEOPLE.chemist);
	expect((await page.goto('/records'))?.status()).toBe(403);
	expect((await page.goto('/admin'))?.status()).toBe(404);
	await expect(page.getByRole('link', { name: 'Admin', exact: true })).toHaveCount(0);
});

test('an admin makes a group and keeps the site safety rules', async ({ page }) => {
	await signIn(page, PEOPLE.admin);
	await page.goto('/admin/groups');
	await page.getByLabel('Name').last().fill('Glass House');
	await page.getByRole('button', { name: 'Make the group' }).click();
	await expect(page.getByText('Glass House is there.')).toBeVisible();
	await page.goto('/admin/site');
	const form = page.locator('form', { has: page.getByRole('button', { name: 'Add the rule' }) });
	await form.getByLabel('Key').fill('PS-77');
	await form.getByLabel('What it is about').fill('Work under glass');
	await form.getByLabel('Contact').fill('ext. 77');
	await form.getByRole('button', { name: 'Add the rule' }).click();
	await expect(page.getByText('Rule PS-77 is added.')).toBeVisible();
	const rule = page.getByRole('listitem').filter({ hasText: 'PS-77' });
	await rule.getByText('Change').click();
	await rule.getByRole('button', { name: 'Take off the list' }).click();
	await expect(page.getByText('Rule PS-77 is taken off the list.')).toBeVisible();
});

for (const shift of ['day', 'night'])
	test(`pages of people and records have no serious fault of accessibility (${shift} shift)`, async ({
		page
	}) => {
		await page.addInitScript((choice) => localStorage.setItem('ratewright.shift', choice), shift);
		const paths = ['/sign-in', '/reset'];
		const inside = ['/account', '/group', '/records'];
		const admin = ['/admin', '/admin/groups', '/admin/site', '/admin/mail'];
		const check = async (path: string) => {
			await page.goto(path);
			// The two shifts differ in their colours alone.
			const axe = new AxeBuilder({ page });
			const { violations } = await (shift === 'day' ? axe : axe.withRules('color-contrast')).analyze();
			const serious = violations.filter((v) => v.impact === 'serious' || v.impact === 'critical');
			expect(serious.map((v) => `${path}: ${v.id} ${v.nodes[0].target.join(' ')}`)).toEqual([]);
		};
		for (const path of paths) await check(path);
		await signInAsLead(page);
		for (const path of inside) await check(path);
		await page.context().clearCookies();
		await signIn(page, PEOPLE.admin);
		for (const path of admin) await check(path);
	});

test('a limit of the group that is refused stays in its field to be corrected', async ({ page }) => {
	await signInAsLead(page);
	await page.goto('/group', { waitUntil: 'networkidle' });
	const limit = page.getByLabel(/gap noted/);
	await limit.fill('seven');
	await limit.press('Enter');
	await expect(page.getByText('Enter the gap in percent, from 0.1 to 100.')).toBeVisible();
	await expect(limit).toHaveValue('seven');
});

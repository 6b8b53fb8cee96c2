import { expect, type ConsoleMessage, type Locator, type Page } from '@playwright/test';

/** The invented people of the demonstration; every one has the same password. */
export const DEMO_PASSWORD = 'amber-glass-demo';
export const PEOPLE = {
	chemist: 'mira.okafor@kilnlane.example',
	lead: 'tunde.adeyemi@kilnlane.example',
	qa: 'ines.vogel@kilnlane.example',
	reader: 'jonas.reyes@kilnlane.example',
	admin: 'site.admin@kilnlane.example'
} as const;

export async function signIn(page: Page, email: string, password = DEMO_PASSWORD): Promise<void> {
	await page.goto('/sign-in');
	await page.getByLabel('E-mail').fill(email);
	await page.getByLabel(/^Password/).fill(password);
	await page.getByRole('button', { name: 'Sign in' }).click();
	await expect(page).not.toHaveURL(/sign-in/);
}

/** Collects what the browser's console reports as an error, so that a test can say there was none. */
export function watchConsole(page: Page): string[] {
	const errors: string[] = [];
	page.on('console', (message: ConsoleMessage) => {
		if (message.type() === 'error') errors.push(`${page.url()}: ${message.text()}`);
	});
	page.on('pageerror', (error) => errors.push(`${page.url()}: ${error.message}`));
	return errors;
}

/** Drags one thing onto another with the mouse, in small steps as a hand would. */
export async function dragTo(page: Page, from: Locator, to: Locator): Promise<void> {
	await from.scrollIntoViewIfNeeded();
	const a = await from.boundingBox();
	const b = await to.boundingBox();
	if (!a || !b) throw new Error('One of the two is not on the page.');
	await page.mouse.move(a.x + a.width / 2, a.y + a.height / 2);
	await page.mouse.down();
	await page.mouse.move(a.x + a.width / 2 + 8, a.y + a.height / 2 + 8, { steps: 4 });
	await page.mouse.move(b.x + b.width / 2, b.y + b.height / 2, { steps: 14 });
	await page.waitForTimeout(250);
	await page.mouse.up();
}

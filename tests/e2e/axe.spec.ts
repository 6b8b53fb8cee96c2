/**
 * Every page of the application, as each role meets it: nothing serious or critical by WCAG A and AA in both shifts, no
 * sideways scrolling at 360 px, nothing in the browser's console. The pages are found by following the links of the
 * demonstration; a page of the source that was not met fails the test.
 */
import { readdirSync } from 'node:fs';
import { expect, test, type Browser, type Page } from '@playwright/test';
import { faultsOf } from './accessibility';
import { PEOPLE, signIn, watchConsole } from './support';
import { demoStudy } from './drawn';
import { chooseGroup, linkMailedTo, sendInvitation, sendReset } from './mail';
import { upload } from './story';

/** Routes of the source that are pages: `/studies/[study]/fit`. */
const ROUTES = readdirSync('src/routes', { recursive: true, encoding: 'utf8' })
	.filter((file) => file.endsWith('+page.svelte'))
	.map((file) => `/${file}`.replace(/\/\([a-z]+\)/g, '').replace(/\/\+page\.svelte$/, '') || '/')
	// Words before places that hold anything: `fit/compare` is no fit.
	.sort((a, b) => a.split('[').length - b.split('[').length);

const routeOf = (path: string) => {
	const parts = path.split('/');
	return ROUTES.find((route) => {
		const words = route.split('/');
		return words.length === parts.length && words.every((w, i) => w.startsWith('[') || w === parts[i]);
	});
};

class Round {
	readonly met = new Set<string>();
	readonly faults: string[] = [];

	/** Looks at one page as it stands. */
	async look(page: Page, words?: string): Promise<void> {
		const path = new URL(page.url()).pathname;
		const route = routeOf(path);
		if (route) this.met.add(route);
		this.faults.push(...(await faultsOf(page, words ?? route ?? path)));
	}

	/** Opens each address and whatever is linked from there, one page of each kind. */
	async walk(page: Page, starts: string[], follow: boolean): Promise<void> {
		const errors = watchConsole(page);
		const done = new Set<string | undefined>([undefined]);
		const queue = starts.map((path) => ({ path, asked: true }));
		for (let next = queue.shift(); next; next = queue.shift()) {
			const route = routeOf(next.path.split('?')[0]);
			if (done.has(route) && !next.asked) continue;
			done.add(route);
			await page.goto(next.path, { waitUntil: 'networkidle' });
			await this.look(page);
			if (follow) queue.push(...(await linksOf(page)).map((path) => ({ path, asked: false })));
		}
		this.faults.push(...errors.map((e) => `console: ${e}`));
	}
}

const linksOf = (page: Page): Promise<string[]> =>
	page.evaluate(() =>
		[...document.querySelectorAll<HTMLAnchorElement>('a[href]:not([download])')]
			.filter((a) => a.origin === location.origin && !a.pathname.startsWith('/sign-out'))
			.map((a) => a.pathname + a.search)
	);

async function personPage(browser: Browser, email: string): Promise<Page> {
	// Colours are measured, so nothing may be half way between two.
	const page = await (await browser.newContext({ reducedMotion: 'reduce' })).newPage();
	await signIn(page, email);
	return page;
}

test('every page of every role is accessible in both shifts, fits 360 px and leaves the console quiet', async ({
	browser
}) => {
	test.setTimeout(300_000);
	const round = new Round();

	const admin = await personPage(browser, PEOPLE.admin);
	await round.walk(admin, ['/admin', '/admin/groups', '/admin/site', '/admin/mail', '/records'], false);

	const chemist = await personPage(browser, PEOPLE.chemist);
	const study = await demoStudy(chemist);
	await round.walk(
		chemist,
		[`${study}/scheme`, '/studies', '/recipes', '/account', '/group', '/api/v1/docs'],
		true
	);
	const fits = await hrefs(chemist, `${study}/fit`, /\/fit\/[0-9a-f-]{36}$/);
	await upload(chemist, study.split('/')[2], 'tests/fixtures/s02_messy.xlsx');
	await round.look(chemist, 'a sheet with open questions');
	const draft = await beginDraft(chemist, study);
	await round.look(chemist, 'a draft recipe');
	await round.walk(
		chemist,
		[
			`${study}/fit/compare?${fits.map((f) => `fits=${f.split('/').pop()}`).join('&')}`,
			`${draft}/v/1`,
			'/sign-out'
		],
		false
	);
	await errorPages(round, chemist);

	const lead = await personPage(browser, PEOPLE.lead);
	await chooseGroup(lead, 'Route Development');
	await lead.goto('/group', { waitUntil: 'networkidle' });
	await round.look(lead, 'the group as its lead sees it');
	await round.walk(lead, await hrefs(lead, '/recipes', /^\/recipes\/[0-9a-f-]{36}$/), false);
	const invited = 'axel.axis@kilnlane.example';
	await sendInvitation(lead, invited);

	const qa = await personPage(browser, PEOPLE.qa);
	await round.walk(qa, ['/records', `${study}/scheme`, `${study}/data`], false);

	const reader = await personPage(browser, PEOPLE.reader);
	await chooseGroup(reader, 'Pilot Hall');
	await round.walk(reader, ['/shared'], true);

	const visitor = await (await browser.newContext({ reducedMotion: 'reduce' })).newPage();
	await sendReset(visitor, PEOPLE.reader);
	const [invitation, reset] = [await linkMailedTo(admin, invited), await linkMailedTo(admin, PEOPLE.reader)];
	await round.walk(visitor, ['/sign-in', '/reset', invitation, reset], false);

	const NOT_A_PAGE_OF_ITS_OWN = ['/', '/studies/[study]', '/studies/[study]/recipe'];
	expect.soft(ROUTES.filter((r) => !round.met.has(r) && !NOT_A_PAGE_OF_ITS_OWN.includes(r))).toEqual([]);
	expect([...new Set(round.faults)]).toEqual([]);
});

async function hrefs(page: Page, path: string, like: RegExp): Promise<string[]> {
	await page.goto(path, { waitUntil: 'networkidle' });
	return [...new Set((await linksOf(page)).filter((href) => like.test(href)))];
}

/** A draft on the newest fit of a study; its address. */
async function beginDraft(page: Page, study: string): Promise<string> {
	await page.goto(`${study}/recipe`, { waitUntil: 'networkidle' });
	await page.getByLabel('Title').fill('Draft to look at');
	await page.getByRole('button', { name: 'Begin the draft' }).click();
	await expect(page).toHaveURL(/\/recipes\/[0-9a-f-]{36}/);
	return new URL(page.url()).pathname;
}

/** The console does speak of a page that is refused; all else holds. */
async function errorPages(round: Round, page: Page): Promise<void> {
	for (const path of ['/nowhere', '/studies/01900000-0000-7000-8000-000000000000/scheme', '/admin']) {
		await page.goto(path);
		await round.look(page, `refusal of ${path}`);
	}
}

/** What every page must keep: WCAG A and AA in both shifts, no sideways scrolling on a narrow screen. */
import AxeBuilder from '@axe-core/playwright';
import { expect, type Page } from '@playwright/test';

const WCAG = ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa'];
const NARROW = { width: 360, height: 780 };

type Axe = (builder: AxeBuilder) => AxeBuilder;

async function violations(page: Page, choose: Axe, place: string): Promise<string[]> {
	const result = await choose(new AxeBuilder({ page }).setLegacyMode()).analyze();
	return result.violations
		.filter((v) => v.impact === 'serious' || v.impact === 'critical')
		.map((v) => `${place}: ${v.id} at ${v.nodes.map((n) => n.target.join(' ')).join(' | ')}`);
}

const setShift = (page: Page, shift: 'day' | 'night') =>
	page.evaluate((to) => {
		document.documentElement.dataset.shift = to;
		window.dispatchEvent(new CustomEvent('shiftchange'));
	}, shift);

/** Elements that stick out of a narrow page; none when the page itself does not scroll sideways. */
const sticksOut = (page: Page) =>
	page.evaluate(() => {
		const { scrollWidth, clientWidth } = document.documentElement;
		if (scrollWidth <= clientWidth) return [];
		// What scrolls within itself does not widen the page.
		const scrolls = (e: Element | null): boolean =>
			e !== null && (getComputedStyle(e).overflowX !== 'visible' || scrolls(e.parentElement));
		const wide = [...document.querySelectorAll('body *')].filter(
			(e) => e.getBoundingClientRect().left + e.scrollWidth > clientWidth + 1 && !scrolls(e.parentElement)
		);
		const name = (e: Element) => `${e.tagName.toLowerCase()}.${[...e.classList].join('.')}`;
		return [`${scrollWidth} px wide:`, ...wide.slice(-4).map(name)];
	});

/** Faults of the page in sight, in words; the page is left by day and in the width that it had. */
export async function faultsOf(page: Page, place: string): Promise<string[]> {
	const wide = page.viewportSize()!;
	await setShift(page, 'day');
	const faults = await violations(page, (axe) => axe.withTags(WCAG), `${place} by day`);
	// The two shifts differ in their colours alone.
	await setShift(page, 'night');
	faults.push(...(await violations(page, (axe) => axe.withRules('color-contrast'), `${place} by night`)));
	await setShift(page, 'day');
	await page.setViewportSize(NARROW);
	faults.push(...(await violations(page, (axe) => axe.withRules('target-size'), `${place} at 360 px`)));
	const wideParts = await sticksOut(page);
	if (wideParts.length) faults.push(`${place} scrolls sideways at 360 px: ${wideParts.join(' ')}`);
	await page.setViewportSize(wide);
	return faults;
}

/** Says of the page in sight, softly, what is wrong with it. */
export async function expectAccessible(page: Page, place: string): Promise<void> {
	expect.soft(await faultsOf(page, place)).toEqual([]);
}

import { settings } from '$lib/server/settings';
import type { LayoutServerLoad } from './$types';

/** What every page knows of the site. */
export const load: LayoutServerLoad = () => {
	const { SITE_TIME_ZONE, SITE_NAME, DEMO } = settings();
	return { timeZone: SITE_TIME_ZONE, siteName: SITE_NAME, demo: DEMO === true };
};

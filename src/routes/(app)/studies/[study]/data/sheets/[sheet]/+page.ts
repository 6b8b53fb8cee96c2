import { browser } from '$app/environment';
import { readingOf } from '$lib/components/data/reading-text';
import type { PageLoadEvent } from './$types';

/** The grid comes beside the record, and only to the page: nobody waits for it before something is in sight. */
export const load = ({ data, params, url }: PageLoadEvent) => ({
	...data,
	/** Somebody brought in a file that was there already. */
	again: url.searchParams.has('again'),
	reading: browser ? { of: readingOf(params.study, params.sheet) } : null
});

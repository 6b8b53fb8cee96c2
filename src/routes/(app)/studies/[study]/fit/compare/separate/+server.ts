import { compareFits } from '$lib/server/fits/compare-fits';
import { requireActor } from '$lib/server/hooks/actor';
import { api } from '$lib/server/http';
import type { RequestEvent } from './$types';

/** The sample that separates two fits most, without the fits themselves. */
export const GET = api(async (event: RequestEvent) => {
	const { comparison, obstacle, fits } = await compareFits(requireActor(event), {
		studyId: event.params.study,
		fitIds: event.url.searchParams.getAll('fits'),
		signal: event.request.signal
	});
	const schemes = Object.fromEntries(fits.map((f) => [`Fit ${f.number}`, f.scheme.name]));
	return { obstacle, schemes, rows: comparison?.rows ?? [], next: comparison?.next ?? null };
});

import { AppError, notFound } from '$lib/server/errors';
import { listFits } from '$lib/server/fits/list-fits';
import { readFit } from '$lib/server/fits/read-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import type { PageServerLoadEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const fit = await readFit(actor, event.params.fit);
	if (fit.studyId !== event.params.study) throw notFound('fit of this study');
	if (!fit.report || fit.report.status === 'failed')
		throw new AppError('wrong-state', 'Samples are planned from a fit that has a result; this one has none.');
	const rivals = (await listFits(actor, fit.studyId))
		.filter((other) => other.number !== null && other.id !== fit.id && other.schemeId !== fit.scheme.id)
		.map(({ id, number, schemeName }) => ({ id, number, schemeName }));
	const { number, request, runs } = fit;
	return { id: fit.id, number, request, runs, rivals };
});

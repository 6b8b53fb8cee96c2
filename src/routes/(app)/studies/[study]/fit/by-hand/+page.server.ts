import { AppError, notFound } from '$lib/server/errors';
import { planFit } from '$lib/server/fits/plan-fit';
import { presetOf } from '$lib/server/fits/preset';
import { readFit } from '$lib/server/fits/read-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { readStudy } from '$lib/server/studies/read-study';
import type { PageServerLoadEvent } from './$types';

/** The scheme over the chosen runs, ready to be moved by hand; from an earlier fit with its estimates, when one is named. */
export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const { study } = event.params;
	const query = event.url.searchParams;
	const from = query.get('from');
	// Who may not see the study learns nothing of what is missing in the address.
	await readStudy(actor, study);
	const begun = from ? await readFit(actor, from) : null;
	if (begun && begun.studyId !== study) throw notFound('fit of this study');
	const preset = begun && presetOf(begun);
	const schemeId = preset?.schemeId ?? query.get('scheme');
	const runIds = preset?.runIds ?? query.getAll('run');
	if (!schemeId || runIds.length === 0)
		throw new AppError('invalid', 'Choose a scheme and at least one run on the fit page first.');
	const plan = await planFit(actor, {
		studyId: study,
		schemeId,
		runIds,
		settings: preset?.parameters,
		reference: preset?.reference,
		options: begun?.request.options
	});
	const estimates = Object.fromEntries((begun?.report?.parameters ?? []).map((p) => [p.id, p.estimate]));
	return {
		request: plan.request,
		scheme: plan.scheme,
		runs: plan.runs.map(({ id, requestId, name }) => ({ id, requestId, name })),
		issues: plan.issues.filter((issue) => issue.level === 'stop'),
		preset,
		estimates,
		fromNumber: begun?.number ?? null
	};
});

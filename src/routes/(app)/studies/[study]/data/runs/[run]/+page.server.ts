import { error, fail } from '@sveltejs/kit';
import { z } from 'zod';
import { exclusionSchema } from '$lib/schemas/run';
import { AppError } from '$lib/server/errors';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { massBalancePercentOf } from '$lib/server/people/group-limits';
import { chooseTemperature } from '$lib/server/runs/choose-temperature';
import { excludePoint } from '$lib/server/runs/exclude-point';
import { readRun } from '$lib/server/runs/read-run';
import { restorePoint } from '$lib/server/runs/restore-point';
import type { PageServerLoadEvent, RequestEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const run = await readRun(requireActor(event), event.params.run);
	if (run.studyId !== event.params.study) error(404, 'There is no such run in this study.');
	return { run, balanceGap: await massBalancePercentOf(run.groupId) };
});

const place = z.object({
	version: z.coerce.number().int().positive(),
	index: z.coerce.number().int().nonnegative(),
	/** Empty: the whole row. */
	channel: z.string().transform((text) => text || null),
	reason: z.string()
});
const program = z.object({
	version: z.coerce.number().int().positive(),
	use: z.enum(['log', 'stated']),
	reason: z.string()
});
const exclusion = place.extend({ reasonCode: exclusionSchema.shape.reasonCode });

/** What the person can mend is shown in the dialog, which keeps what was typed. */
async function attempt(work: () => Promise<unknown>) {
	try {
		await work();
	} catch (caught) {
		if (caught instanceof AppError && ['invalid', 'version-changed', 'wrong-state'].includes(caught.code))
			return fail(caught.status === 422 ? 400 : caught.status, {
				message: caught.message,
				field: caught.options.fields?.[0]?.field ?? null
			});
		throw caught;
	}
}

export const actions = {
	exclude: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const form = exclusion.parse(Object.fromEntries(await event.request.formData()));
		return attempt(() => excludePoint(actor, { ...form, runId: event.params.run }));
	}),
	program: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const { use, ...form } = program.parse(Object.fromEntries(await event.request.formData()));
		const useLog = use === 'log';
		return attempt(() => chooseTemperature(actor, { ...form, useLog, runId: event.params.run }));
	}),
	restore: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const form = place.parse(Object.fromEntries(await event.request.formData()));
		return attempt(() => restorePoint(actor, { ...form, runId: event.params.run }));
	})
};

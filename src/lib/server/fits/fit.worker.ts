import type { FitReport, FitRequest } from '$lib/schemas/fit';
import { fit, FitRequestError } from '$lib/kinetics/fit/fit';
import { Refused, serveTask } from '../jobs/worker-side';

serveTask<FitRequest, FitReport>((request, hooks) => {
	try {
		return fit(request, { onProgress: hooks.progress, cancelled: hooks.cancelled });
	} catch (caught) {
		if (!(caught instanceof FitRequestError)) throw caught;
		throw new Refused(
			caught.message,
			caught.issues.map(({ message, parameters, runs }) => ({
				field: parameters?.[0] ?? runs?.[0] ?? 'request',
				message
			}))
		);
	}
});

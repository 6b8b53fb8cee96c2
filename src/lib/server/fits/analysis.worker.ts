import { ComparisonError } from '$lib/kinetics/fit/compare';
import { FitRequestError } from '$lib/kinetics/fit/fit';
import { Refused, serveTask } from '../jobs/worker-side';
import { analyse, type AnalysisTask } from './analyse';

serveTask<AnalysisTask, unknown>((task, hooks) => {
	try {
		return analyse(task, { onProgress: hooks.progress, cancelled: hooks.cancelled });
	} catch (caught) {
		if (caught instanceof ComparisonError || caught instanceof FitRequestError)
			throw new Refused(caught.message);
		throw caught;
	}
});

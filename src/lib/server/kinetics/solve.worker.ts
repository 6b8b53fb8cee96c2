import type { SolveAnswer, SolveRequest } from '$lib/schemas/solve';
import { Refused, serveTask } from '../jobs/worker-side';
import { solveBatch, SolveRefused } from './solve-batch';

serveTask<SolveRequest, SolveAnswer>((request) => {
	try {
		return solveBatch(request);
	} catch (caught) {
		if (caught instanceof SolveRefused) throw new Refused(caught.message, caught.fields);
		throw caught;
	}
});

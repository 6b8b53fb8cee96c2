import { AppError } from '../errors';
import { Refused, serveTask } from '../jobs/worker-side';
import { buildWorkbook } from './build';
import type { WorkbookInput } from './input';

serveTask<WorkbookInput, Uint8Array>(async (input) => {
	try {
		return new Uint8Array(await buildWorkbook(input));
	} catch (caught) {
		if (!(caught instanceof AppError)) throw caught;
		throw new Refused(caught.message);
	}
});

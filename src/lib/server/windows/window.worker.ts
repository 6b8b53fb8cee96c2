import type { FirstFormInput } from '$lib/kinetics/window';
import { firstFormWindow, WindowRefusal } from '$lib/kinetics/window';
import type { FirstFormResult } from '$lib/schemas/window';
import { Refused, serveTask } from '../jobs/worker-side';

serveTask<FirstFormInput, FirstFormResult>((input) => {
	try {
		return firstFormWindow(input);
	} catch (caught) {
		if (!(caught instanceof WindowRefusal)) throw caught;
		throw new Refused(caught.message, [{ field: caught.field ?? 'request', message: caught.message }]);
	}
});

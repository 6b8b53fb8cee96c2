import { z } from 'zod';
import { fitOptions } from './fit';

/** What starts a recorded fit: a scheme and runs of the study by their ids. */
export const fitStart = z.strictObject({
	schemeId: z.string().min(1, 'Choose a scheme.'),
	runIds: z.array(z.string()).min(1, 'Choose at least one run.').max(100),
	options: fitOptions.prefault({}),
	/** Which activation energies are fitted when the runs differ in temperature. */
	energies: z.enum(['missing', 'all', 'scheme']).default('missing'),
	/**
	 * Reference temperature when energies are fitted: `auto` takes the scheme's where it lies inside the studied range, else the
	 * centre 1/mean(1/T) of the runs.
	 */
	reference: z.enum(['auto', 'scheme', 'centre']).default('auto')
});
export type FitStart = z.infer<typeof fitStart>;

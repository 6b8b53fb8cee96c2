/** Curves and bands of a fit, run by run: computed by the service when a run is first looked at, then kept. */
import { SvelteMap } from 'svelte/reactivity';
import type { Prediction } from '$lib/kinetics/fit';
import { askFit } from './ask';

export class RunCurves {
	problem = $state('');
	private readonly found = new SvelteMap<string, Prediction>();
	private readonly asked: Record<string, boolean> = {};

	constructor(private readonly fitUrl: () => string) {}

	/** Undefined until they are there. */
	of(run: string): Prediction | undefined {
		return this.found.get(run);
	}

	async need(run: string): Promise<void> {
		if (this.asked[run]) return;
		this.asked[run] = true;
		this.problem = '';
		try {
			this.found.set(run, await askFit<'curves'>(this.fitUrl(), { kind: 'curves', run, points: 160 }));
		} catch (caught) {
			this.asked[run] = false;
			this.problem = caught instanceof Error ? caught.message : String(caught);
		}
	}
}

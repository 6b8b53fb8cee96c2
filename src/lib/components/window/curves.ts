/** The curves of a window: the fit's scheme at the window's temperature and charge, with bands, as a run not yet made. */
import { predict } from '$lib/kinetics/fit/bands';
import type { FitReport, FitRequest } from '$lib/schemas/fit';
import type { FirstFormRequest } from '$lib/schemas/window';
import type { RunContent } from '$lib/schemas/run';
import type { ChartSeries } from '../charts/types';

export function windowRun(request: FirstFormRequest, fit: FitRequest): RunContent {
	return {
		id: 'window',
		temperature: request.temperature,
		initial: request.charge,
		excess: request.excess,
		timeUnit: request.timeUnit,
		channels: fit.species.map((s) => ({ id: s.id, weights: { [s.id]: 1 }, unit: 'mol/L' })),
		timepoints: []
	};
}

export function windowSeries(
	report: FitReport,
	fit: FitRequest,
	request: FirstFormRequest,
	end: number
): ChartSeries[] {
	const times = Array.from({ length: 200 }, (_, i) => (end * i) / 199);
	const { series } = predict(report, fit, windowRun(request, fit), times, { foreign: true });
	return fit.species.flatMap((s, i) => {
		const found = series.find((p) => p.kind === 'species' && p.id === s.id);
		if (!found) return [];
		return [
			{
				id: s.id,
				label: s.id,
				index: s.series ?? i,
				curve: { x: times, y: found.curve },
				...(found.confidence
					? { confidence: { x: times, low: found.confidence[0], high: found.confidence[1] } }
					: {})
			}
		];
	});
}

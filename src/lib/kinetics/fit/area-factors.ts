/**
 * Response factors of a limit in area %, taken from the channels that the run is assayed by, so that limit and fit speak of the
 * same detector (formula of area % in `channels.ts`).
 *
 *     f_i = Σ_j f_j w_ji     over the area-% channels j of the run; 1 for a species that none of them sees
 */
import type { CriterionContent } from '../../schemas/criterion';
import type { FitReport } from '../../schemas/fit';
import { isFitted } from '../../schemas/quantity';
import type { RunContent } from '../../schemas/run';
import { isAreaPercent } from './channels';
import { localId } from './local-slots';

export interface AreaFactors {
	/** Relative response factors, molar basis, by species. */
	factors: Record<string, number>;
	/** What they rest on, in words; null where the limit is not in area %. */
	note: string | null;
}

/**
 * @param run with its id
 * @throws RangeError where such a factor is fitted: its uncertainty would be left out of the answer
 */
export function areaFactors(content: CriterionContent, run: RunContent, report: FitReport): AreaFactors {
	if (content.unit !== 'area %') return { factors: {}, note: null };
	const factors: Record<string, number> = {};
	for (const channel of run.channels.filter((c) => isAreaPercent(c.unit))) {
		const factor = factorOf(channel, run, report);
		for (const [species, weight] of Object.entries(channel.weights))
			if (weight !== 0) factors[species] = (factors[species] ?? 0) + weight * factor;
	}
	const others = Object.entries(factors).filter(([, f]) => f !== 1);
	const stated = others.map(([species, f]) => `${species} ${Number(f.toPrecision(4))}`).join(', ');
	return {
		factors,
		note: stated
			? `response factors of the run's columns: ${stated}, every other species 1`
			: 'response factor 1 for every species'
	};
}

function factorOf(channel: RunContent['channels'][number], run: RunContent, report: FitReport): number {
	const given = channel.responseFactor;
	if (!given) return 1;
	const shared = `${channel.id}.responseFactor`;
	const reported =
		report.parameters.find((p) => p.id === localId(run.id ?? '', shared)) ??
		report.parameters.find((p) => p.id === shared);
	if (reported ? reported.state !== 'fixed' : isFitted(given))
		throw new RangeError(
			`A limit in area % needs known response factors, and that of ${channel.id} is fitted or tied. Hold it fixed, or give the limit in % of charge.`
		);
	return isFitted(given) ? reported!.estimate : given.value;
}

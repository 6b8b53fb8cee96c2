/**
 * Mass balance of each sampled row: a conserved total of the scheme as assayed, in percent of the charge, and its trend.
 *
 *     percent_k = 100 · Σ m_i c_i(t_k) / Σ m_i c_i(0),   slope by least squares with a t interval
 *
 * Only where every species of the total has a channel of its own in that run, in absolute terms: area % always adds to 100 and
 * says nothing.
 */
import type { FitReport } from '../../schemas/fit';
import { conservedTotals } from '../conserved';
import { evaluateLinear } from './affine';
import { studentQuantile } from './distributions';
import type { KineticProblem } from './problem';
import type { RunModel } from './run-model';
import { straightLine } from './straight-line';

/** Weights over the assayed channels of a run, or null where no conserved total is wholly assayed. */
function balanceChannels(
	problem: KineticProblem,
	run: RunModel
): { channels: { channel: string; weight: number }[]; total: Float64Array } | null {
	const totals = conservedTotals(problem.network).filter(({ weights }) => weights.every((w) => w >= 0));
	const charged = totals.filter(({ weights }) =>
		run.charge.some((c, i) => weights[i] > 0 && (c.constant !== 0 || c.terms.length > 0))
	);
	for (const { weights } of charged.sort((a, b) => count(b.weights) - count(a.weights))) {
		const channels: { channel: string; weight: number }[] = [];
		let complete = true;
		weights.forEach((m, species) => {
			if (m === 0) return;
			const own = run.channels.find(
				(c) => c.species.length === 1 && c.species[0] === species && !c.scaleFitted && !c.areaPercent
			);
			if (!own) complete = false;
			else
				channels.push({ channel: own.id, weight: m / (own.weights[0] * Math.exp(own.lnResponse.constant)) });
		});
		if (complete && channels.length > 1) return { channels, total: weights };
	}
	return null;
}

const count = (weights: Float64Array) => weights.reduce((a, w) => a + (w !== 0 ? 1 : 0), 0);

/** Σ m_i c_i(0): what of the charge counts in this total. */
function chargedIn(total: Float64Array, run: RunModel, x: ArrayLike<number>): number {
	return total.reduce((sum, m, i) => sum + m * evaluateLinear(run.charge[i], x), 0);
}

/** One entry for each run that has a wholly assayed conserved total. */
export function massBalance(
	problem: KineticProblem,
	x: ArrayLike<number>,
	confidence: number
): FitReport['massBalance'] {
	return problem.runs.flatMap((run) => {
		const balance = balanceChannels(problem, run);
		if (!balance) return [];
		const { channels } = balance;
		const charge = chargedIn(balance.total, run, x);
		if (!(charge > 0)) return [];
		const given = problem.request.runs[run.index];
		const out = new Set((given.exclusions ?? []).map((e) => `${e.index}|${e.channel ?? '*'}`));
		const percent: { time: number; value: number }[] = [];
		given.timepoints.forEach((row, index) => {
			let total = 0;
			for (const { channel, weight } of channels) {
				const value = row.values[channel];
				if (typeof value !== 'number' || out.has(`${index}|*`) || out.has(`${index}|${channel}`)) return;
				total += weight * value;
			}
			percent.push({ time: row.time, value: (100 * total) / charge });
		});
		return percent.length
			? [{ run: run.id, percent, ...trend(percent, run.timeFactor / 3600, confidence) }]
			: [];
	});
}

function trend(
	percent: { time: number; value: number }[],
	hours: number,
	confidence: number
): { slopePerHour: number | null; slopeCi95: [number, number] | null } {
	const distinct = new Set(percent.map((p) => p.time));
	if (distinct.size < 3) return { slopePerHour: null, slopeCi95: null };
	const line = straightLine(
		percent.map((p) => p.time * hours),
		percent.map((p) => p.value)
	);
	const half = studentQuantile(0.5 + confidence / 2, line.degreesOfFreedom) * line.slopeError;
	return { slopePerHour: line.slope, slopeCi95: [line.slope - half, line.slope + half] };
}

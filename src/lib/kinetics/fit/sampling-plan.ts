/**
 * When to take the next samples: D-optimal times.
 *
 *     maximise ln det(M₀ + Σ_k g(t_k) g(t_k)ᵀ/σ²)
 *
 * g is the derivative of what is assayed with respect to the estimates at their present values; M₀ the information already
 * there (none for a first plan). An exchange algorithm moves one time at a time over a grid of allowed times until no move
 * helps, then each time is refined between its neighbours. Times keep the minimum gap and the allowed windows.
 *
 * Sources: Box & Lucas, Biometrika 46 (1959) 77; Fedorov, Theory of Optimal Experiments (1972) 3 (exchange); Cook & Nachtsheim,
 * Technometrics 22 (1980) 315.
 */
import type { FitFinding, FitReport, FitRequest } from '../../schemas/fit';
import type { RunContent } from '../../schemas/run';
import { cholesky, invertPositiveDefinite } from './linear-algebra';
import { studentQuantile } from './distributions';
import { probeModel, type Probe } from './probe';
import { estimatesOf, restoreFit } from './restore';
import { searchBox } from './starts';
import { reportedFactor, toReported } from './slots';
import { sigmaFor } from './weights';

export interface SamplingOptions {
	/** How many samples to plan. */
	samples: number;
	/** Earliest and latest feasible time, in the run's time unit. */
	earliest: number;
	latest: number;
	/** Least time between two samples; 0 allows replicates. */
	minimumGap?: number;
	/** Allowed windows (for example working hours), in the run's time unit; all of the span when left out. */
	windows?: [number, number][];
	/** Channels that will be assayed; all of the run's when left out. */
	channels?: string[];
	/** Standard deviation of one value when there is no report to take it from, in the channel's unit. */
	expectedSd?: number;
	confidence?: number;
}

export interface ExpectedWidth {
	parameter: string;
	unit: string;
	estimate: number;
	/** Half-width of the t interval now; null without a fit, or where the data do not determine it. */
	before: number | null;
	/** Half-width expected with the planned samples added. */
	after: number | null;
}

export interface SamplingPlan {
	/** Ascending, in the run's time unit. */
	times: number[];
	timeUnit: RunContent['timeUnit'];
	/** ln det of the information; −Infinity where the plan cannot determine all parameters. */
	logDeterminant: number;
	expected: ExpectedWidth[];
	findings: FitFinding[];
}

const GRID = 240;

/**
 * Plans samples of one run.
 * @param run conditions and channels of the run to sample; its timepoints do not matter
 * @param report the fit so far: its estimates, s and information are used; null plans from the request's starting values alone
 * @throws RangeError for limits that leave no room
 */
export function samplingPlan(
	request: FitRequest,
	report: FitReport | null,
	run: RunContent,
	options: SamplingOptions
): SamplingPlan {
	const grid = allowedTimes(options);
	const design = new Design(request, report, run, options, grid);
	const chosen = design.exchange(options.samples);
	const times = design.refine(chosen.map((k) => grid[k]));
	return design.describe(times);
}

function allowedTimes({ earliest, latest, windows, samples, minimumGap = 0 }: SamplingOptions): number[] {
	if (!(earliest >= 0) || !(latest > earliest))
		throw new RangeError(`The latest time must lie after the earliest; found ${earliest} and ${latest}.`);
	if (!Number.isInteger(samples) || samples < 1 || samples > 60)
		throw new RangeError(`Between 1 and 60 samples can be planned; found ${samples}.`);
	if (minimumGap * (samples - 1) > latest - earliest)
		throw new RangeError(
			`${samples} samples at least ${minimumGap} apart do not fit between ${earliest} and ${latest}.`
		);
	const linear = Array.from({ length: GRID }, (_, k) => earliest + ((latest - earliest) * k) / (GRID - 1));
	const low = Math.max(earliest, latest * 1e-3);
	const log = Array.from({ length: GRID }, (_, k) => low * (latest / low) ** (k / (GRID - 1)));
	const inside = (t: number) => !windows?.length || windows.some(([a, b]) => t >= a && t <= b);
	const edges = (windows ?? []).flat().filter((t) => t >= earliest && t <= latest);
	const all = [...new Set([...linear, ...log, ...edges])]
		.filter((t) => t > 0 && inside(t))
		.sort((a, b) => a - b);
	if (all.length === 0) throw new RangeError('The windows leave no time to sample.');
	return all;
}

class Design {
	private readonly probe: Probe;
	private readonly x: Float64Array;
	private readonly scale: number[];
	private readonly prior: number[][];
	private readonly rows: number[][][];
	private readonly s: number;
	private readonly gap: number;

	constructor(
		private readonly request: FitRequest,
		private readonly report: FitReport | null,
		private readonly run: RunContent,
		private readonly options: SamplingOptions,
		private readonly grid: number[]
	) {
		const known = (id: string) => report?.parameters.some((p) => p.id === id) ?? true;
		this.probe = probeModel(request, run, grid, known);
		const { problem } = this.probe;
		this.x = report ? estimatesOf(report, problem) : searchBox(problem).guess;
		this.scale = problem.free.map((slot, j) => (slot.scale === 'ln' ? 1 : Math.abs(this.x[j]) || 1));
		this.s = report?.residualStandardError ?? options.expectedSd ?? 1;
		this.prior = this.priorInformation();
		this.rows = this.sensitivities(this.probe);
		this.gap = options.minimumGap ?? 0;
	}

	/** JᵀJ/s² of the fit so far, per scaled parameter. */
	private priorInformation(): number[][] {
		const p = this.x.length;
		const empty = Array.from({ length: p }, () => new Array<number>(p).fill(0));
		if (!this.report) return empty;
		const { model } = restoreFit(this.report, this.request);
		const jacobian = new Float64Array(model.m * p);
		model.evaluate(this.x, new Float64Array(model.m), jacobian);
		for (let i = 0; i < p; i++)
			for (let j = 0; j < p; j++) {
				let sum = 0;
				for (let k = 0; k < model.m; k++) sum += jacobian[i * model.m + k] * jacobian[j * model.m + k];
				empty[i][j] = (sum * this.scale[i] * this.scale[j]) / this.s ** 2;
			}
		return empty;
	}

	/** rows[k] lists, for the k-th time, one weighted derivative row per channel assayed. */
	private sensitivities({ problem, model, at }: Probe): number[][][] {
		const p = model.p;
		const out = new Float64Array(model.m);
		const jacobian = new Float64Array(model.m * p);
		if (!model.evaluatePredictions(this.x, out, jacobian))
			throw new RangeError('The curves cannot be computed at these values.');
		const channels = problem.runs[at].channels;
		const assayed = (id: string) =>
			!id.startsWith('species ') && (!this.options.channels || this.options.channels.includes(id));
		const count = Math.max(...model.points.map((q) => q.index)) + 1;
		const rows: number[][][] = Array.from({ length: count }, () => []);
		model.points.forEach((point, i) => {
			const { id } = channels[point.channel];
			if (!assayed(id)) return;
			const sigma = this.s * sigmaFor(problem, id, out[i]);
			rows[point.index].push(
				Array.from({ length: p }, (_, j) => (jacobian[j * model.m + i] * this.scale[j]) / sigma)
			);
		});
		return rows;
	}

	private logDeterminant(rows: number[][][]): number {
		const matrix = this.prior.map((r) => r.slice());
		for (const channels of rows) for (const g of channels) addOuter(matrix, g);
		return logDet(matrix);
	}

	/** Exchange on the grid; a ridge stands in for what the first few samples cannot determine yet. */
	exchange(samples: number): number[] {
		const last = this.grid.length - 1;
		let chosen = spread(this.grid, samples, this.gap);
		let value = this.ridged(chosen);
		for (let round = 0; round < 60; round++) {
			let improved = false;
			for (let q = 0; q < samples; q++) {
				let best = chosen[q];
				for (let k = 0; k <= last; k++) {
					const trial = chosen.slice();
					trial[q] = k;
					if (!this.gapsKept(trial)) continue;
					const next = this.ridged(trial);
					if (next <= value + 1e-10) continue;
					value = next;
					best = k;
				}
				if (best === chosen[q]) continue;
				chosen = chosen.slice();
				chosen[q] = best;
				improved = true;
			}
			if (!improved) break;
		}
		return chosen;
	}

	private ridged(chosen: number[]): number {
		const matrix = this.prior.map((r, i) => r.map((v, j) => v + (i === j ? 1e-9 : 0)));
		for (const k of chosen) for (const g of this.rows[k]) addOuter(matrix, g);
		return logDet(matrix);
	}

	private gapsKept(chosen: number[]): boolean {
		const times = chosen.map((k) => this.grid[k]).sort((a, b) => a - b);
		return times.every((t, i) => i === 0 || t - times[i - 1] >= this.gap - 1e-12);
	}

	/** Each time between its neighbours on the grid, on finer and finer grids. */
	refine(times: number[]): number[] {
		let out = times.slice();
		for (let round = 0; round < 2; round++) for (let q = 0; q < out.length; q++) out = this.refineOne(out, q);
		return out.sort((a, b) => a - b);
	}

	private refineOne(times: number[], q: number): number[] {
		const at = this.grid.findIndex((t) => t >= times[q] - 1e-12);
		let low = this.grid[Math.max(0, at - 1)];
		let high = this.grid[Math.min(this.grid.length - 1, at + 1)];
		const others = times.filter((_, i) => i !== q);
		let best = times[q];
		for (let zoom = 0; zoom < 3; zoom++) {
			const fine = Array.from({ length: 17 }, (_, k) => low + ((high - low) * k) / 16);
			const candidates = [best, ...fine.filter((t) => t > 0 && this.allowed(times, q, t))];
			const rows = this.rowsAt([...others, ...candidates]);
			const fixed = rows.slice(0, others.length);
			let value = -Infinity;
			candidates.forEach((t, k) => {
				const next = this.logDeterminant([...fixed, rows[others.length + k]]);
				if (next > value + 1e-13) {
					value = next;
					best = t;
				}
			});
			const width = (high - low) / 8;
			low = best - width / 2;
			high = best + width / 2;
		}
		return times.map((t, i) => (i === q ? best : t));
	}

	private allowed(times: number[], q: number, t: number): boolean {
		const { windows } = this.options;
		if (windows?.length && !windows.some(([a, b]) => t >= a && t <= b)) return false;
		return times.every((other, i) => i === q || Math.abs(other - t) >= this.gap - 1e-12);
	}

	private rowsAt(times: number[]): number[][][] {
		const unique = [...new Set(times)];
		const known = (id: string) => this.report?.parameters.some((p) => p.id === id) ?? true;
		const rows = this.sensitivities(probeModel(this.request, this.run, unique, known));
		return times.map((t) => rows[unique.indexOf(t)]);
	}

	describe(times: number[]): SamplingPlan {
		const { problem } = this.probe;
		const confidence = this.options.confidence ?? 0.95;
		const rows = this.rowsAt(times);
		const matrix = this.prior.map((r) => r.slice());
		for (const channels of rows) for (const g of channels) addOuter(matrix, g);
		const after = invertPositiveDefinite(matrix);
		const added = rows.reduce((sum, r) => sum + r.length, 0);
		const dof = (this.report?.degreesOfFreedom ?? -problem.free.length) + added;
		const t = dof > 0 ? studentQuantile(0.5 + confidence / 2, dof) : NaN;
		const expected = problem.free.map((slot, j): ExpectedWidth => {
			const natural = slot.scale === 'ln' ? Math.exp(this.x[j]) : this.x[j];
			const estimate = toReported(slot, natural);
			const unit = slot.scale === 'ln' ? Math.abs(estimate) : Math.abs(reportedFactor(slot));
			const now = this.report?.parameters.find((p) => p.id === slot.id);
			const half = after ? t * Math.sqrt(after[j][j]) * this.scale[j] * unit : NaN;
			return {
				parameter: slot.id,
				unit: slot.unit,
				estimate,
				before: now?.ci95 ? 0.5 * (now.ci95[1] - now.ci95[0]) : null,
				after: Number.isFinite(half) ? half : null
			};
		});
		const logDeterminant = logDet(matrix);
		return {
			times,
			timeUnit: this.run.timeUnit,
			logDeterminant,
			expected,
			findings: this.remarks(after !== null, added)
		};
	}

	private remarks(determined: boolean, added: number): FitFinding[] {
		const p = this.x.length;
		if (determined) return [];
		return [
			{
				code: 'plan-insufficient',
				level: 'caution',
				message: `${added} new value${added === 1 ? '' : 's'} cannot determine all ${p} parameters: plan more samples, assay more species, or fix a parameter.`
			}
		];
	}
}

function addOuter(matrix: number[][], g: number[]): void {
	for (let i = 0; i < g.length; i++) {
		const row = matrix[i];
		for (let j = 0; j < g.length; j++) row[j] += g[i] * g[j];
	}
}

function logDet(matrix: number[][]): number {
	const factor = cholesky(matrix);
	return factor ? 2 * factor.reduce((sum, row, i) => sum + Math.log(row[i]), 0) : -Infinity;
}

/** First choice: spread evenly over the grid, with the gap kept where that is possible. */
function spread(grid: number[], samples: number, gap: number): number[] {
	const chosen: number[] = [];
	let next = -Infinity;
	const last = grid.length - 1;
	for (let q = 0; q < samples; q++) {
		const even = Math.round(((q + 0.5) / samples) * last);
		let k = Math.max(even, 0);
		while (k < last && grid[k] < next) k++;
		chosen.push(k);
		next = grid[k] + gap;
	}
	const kept = chosen.every((k, q) => q === 0 || grid[k] - grid[chosen[q - 1]] >= gap - 1e-12);
	if (kept) return chosen;
	// Tight gaps: pack from the front.
	const packed: number[] = [];
	next = -Infinity;
	for (let k = 0; k <= last && packed.length < samples; k++)
		if (grid[k] >= next - 1e-12) {
			packed.push(k);
			next = grid[k] + gap;
		}
	if (packed.length < samples)
		throw new RangeError(`${samples} samples at least ${gap} apart do not fit into the allowed times.`);
	return packed;
}

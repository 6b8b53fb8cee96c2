/**
 * The search for D-optimal times: exchange over a grid, then refinement between neighbours (formulas in `sampling-plan.ts`).
 *
 * Sources: Fedorov, Theory of Optimal Experiments (1972) 3 (exchange); Cook & Nachtsheim, Technometrics 22 (1980) 315.
 */
import type { FitFinding, FitReport, FitRequest } from '../../schemas/fit';
import type { RunContent } from '../../schemas/run';
import type { Watch } from './cancelled';
import { studentQuantile } from './distributions';
import { cholesky, invertPositiveDefinite } from './positive-definite';
import { probeModel, type Probe } from './probe';
import type { KineticProblem } from './problem';
import { estimatesOf, restoreFit, type RestoredFit } from './restore';
import { spread } from './sampling-grid';
import type { ExpectedWidth, SamplingOptions, SamplingPlan } from './sampling-plan';
import { reportedFactor, toReported } from './slots';
import { searchBox } from './starts';
import { sigmaFor } from './weights';

export class Design {
	private readonly probe: Probe;
	private readonly x: Float64Array;
	private readonly scale: number[];
	private readonly prior: number[][];
	private readonly rows: number[][][];
	private readonly s: number;
	private readonly gap: number;
	/** The problem with its own error model: the probe's points carry none. */
	private readonly measured: KineticProblem;

	constructor(
		private readonly request: FitRequest,
		private readonly report: FitReport | null,
		private readonly run: RunContent,
		private readonly options: SamplingOptions,
		private readonly grid: number[],
		private readonly watch: Watch | null = null
	) {
		const known = (id: string) => report?.parameters.some((p) => p.id === id) ?? true;
		this.probe = probeModel(request, run, grid, known);
		const { problem } = this.probe;
		const fitted = report ? restoreFit(report, request) : null;
		// Without a fit the error model stands on the request's weights alone.
		this.measured = fitted?.problem ?? { ...problem, request };
		this.x = report ? estimatesOf(report, problem) : searchBox(problem).guess;
		this.scale = problem.free.map((slot, j) => (slot.scale === 'ln' ? 1 : Math.abs(this.x[j]) || 1));
		this.s = report?.residualStandardError ?? options.expectedSd ?? 1;
		this.prior = this.priorInformation(fitted);
		this.rows = this.sensitivities(this.probe);
		this.gap = options.minimumGap ?? 0;
	}

	/** JᵀJ/s² of the fit so far, per scaled parameter. */
	private priorInformation(fitted: RestoredFit | null): number[][] {
		const p = this.x.length;
		const empty = Array.from({ length: p }, () => new Array<number>(p).fill(0));
		if (!fitted) return empty;
		const { model } = fitted;
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
		const largest = out.reduce((size, v) => Math.max(size, Math.abs(v)), 0);
		const count = Math.max(...model.points.map((q) => q.index)) + 1;
		const rows: number[][][] = Array.from({ length: count }, () => []);
		model.points.forEach((point, i) => {
			const { id } = channels[point.channel];
			if (!assayed(id)) return;
			// Without a fit a proportional error has no largest value to take its floor from: the curve's own stands in.
			const sigma = this.s * (sigmaFor(this.measured, id, out[i]) || 0.01 * largest || 1);
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
		const chosen = spread(this.grid, samples, this.gap);
		let value = logDet(this.without(chosen, -1));
		for (let round = 0; round < 60; round++) {
			let improved = false;
			for (let q = 0; q < samples; q++) {
				const base = this.without(chosen, q);
				const before = chosen[q];
				for (let k = 0; k < this.grid.length; k++) {
					if (!this.gapsKept(chosen, q, k)) continue;
					if ((k & 31) === 0) this.watch?.();
					const next = logDet(withRows(base, this.rows[k]));
					if (next <= value + 1e-10) continue;
					value = next;
					chosen[q] = k;
				}
				if (chosen[q] !== before) improved = true;
			}
			if (!improved) break;
		}
		return chosen;
	}

	/** Information of what is there and of the chosen times but one, with the ridge. */
	private without(chosen: number[], left: number): number[][] {
		const matrix = this.prior.map((r, i) => r.map((v, j) => v + (i === j ? 1e-9 : 0)));
		chosen.forEach((k, q) => {
			if (q !== left) for (const g of this.rows[k]) addOuter(matrix, g);
		});
		return matrix;
	}

	private gapsKept(chosen: number[], q: number, k: number): boolean {
		return chosen.every(
			(other, i) => i === q || Math.abs(this.grid[other] - this.grid[k]) >= this.gap - 1e-12
		);
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
		this.watch?.();
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

function withRows(base: number[][], rows: number[][]): number[][] {
	const matrix = base.map((r) => r.slice());
	for (const g of rows) addOuter(matrix, g);
	return matrix;
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

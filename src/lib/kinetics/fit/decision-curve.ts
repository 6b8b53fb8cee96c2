/**
 * The curve of one species in one run, and the condition that makes a time worth knowing (see `decision.ts`).
 */
import type { FitReport } from '../../schemas/fit';
import type { RunContent } from '../../schemas/run';
import { probeModel } from './probe';
import type { RestoredFit } from './restore';

/** What holds at the time sought: the curve is at its most, at a share of its start, or at a level. */
export type Condition =
	{ kind: 'slope' } | { kind: 'share'; share: number } | { kind: 'level'; level: number };

/** Half distance of the two points of a slope, as a share of the time. */
const DELTA = 1e-4;
const GRID = 81;
const ROUNDS = 8;
/** Differences this small beside the values are rounding: no time is read from them. */
const ROUNDING = 1e-13;

export interface GapAt {
	/** g(t, θ) */
	gap: number;
	/** ∂g/∂t in the run's time unit. */
	slope: number;
	/** ∂g/∂θ on the scale of estimation. */
	gapGradient: Float64Array;
	/** y(t) and ∂y/∂θ. */
	value: number;
	valueGradient: Float64Array;
}

/** Values at some times, and their derivatives with respect to the estimates, by time. */
export interface Curve {
	values: Float64Array;
	rows: Float64Array[];
}

export class CurveOfSpecies {
	unit = '';
	protected readonly known: (id: string) => boolean;

	constructor(
		protected readonly fitted: RestoredFit,
		report: FitReport,
		protected readonly run: RunContent,
		private readonly species: string,
		private readonly condition: Condition
	) {
		this.known = (id) => report.parameters.some((p) => p.id === id);
	}

	/** Values at the times, and derivatives by row. @throws RangeError where the curves cannot be computed */
	protected curve(x: Float64Array, times: number[]): Curve {
		const { problem, model, at } = probeModel(this.fitted.problem.request, this.run, times, this.known);
		const channels = problem.runs[at].channels;
		const place = channels.findIndex((c) => c.id === `species ${this.species}`);
		this.unit = channels[place].unit;
		const out = new Float64Array(model.m);
		const jacobian = new Float64Array(model.m * model.p);
		if (!model.evaluatePredictions(x, out, jacobian))
			throw new RangeError('The curves of this run cannot be computed at these constants.');
		const first = place * times.length;
		const rows = times.map((_, k) =>
			Float64Array.from({ length: model.p }, (__, j) => jacobian[j * model.m + first + k])
		);
		return { values: out.slice(first, first + times.length), rows };
	}

	/** g at ascending times; zero where it is no more than rounding of the values that it is made of. */
	private gaps(x: Float64Array, times: number[]): number[] {
		const { condition } = this;
		if (condition.kind === 'slope') {
			const { values } = this.curve(
				x,
				times.flatMap((t) => [t * (1 - DELTA), t * (1 + DELTA)])
			);
			const noise = ROUNDING * largest(values);
			return times.map((_, k) => clear(values[2 * k + 1] - values[2 * k], noise));
		}
		const { values } = this.curve(x, [0, ...times]);
		const aim = condition.kind === 'share' ? condition.share * values[0] : condition.level;
		const noise = ROUNDING * Math.max(largest(values), Math.abs(aim));
		return times.map((_, k) => clear(values[k + 1] - aim, noise));
	}

	/**
	 * First time at which g changes its sign (for a maximum: from rising to falling); null where it does not.
	 * @param after looked at from here on; from the start unless given
	 */
	firstTime(x: Float64Array, horizon: number, after = 0): number | null {
		let [from, to] = [Math.max(horizon * 1e-5, after * (1 + 1e-6)), horizon];
		if (!(to > from)) return null;
		// Spread as powers at first, so that early events are not stepped over.
		let times = Array.from({ length: 4 * GRID }, (_, k) => from * (to / from) ** (k / (4 * GRID - 1)));
		for (let round = 0; round < ROUNDS; round++) {
			const gaps = this.gaps(x, times);
			const pair = this.crossing(gaps);
			if (!pair) return null;
			const [k, l] = pair;
			[from, to] = [times[k], times[l]];
			const straight = from + ((to - from) * gaps[k]) / (gaps[k] - gaps[l]);
			if (to - from <= 1e-7 * to) return straight;
			times = Array.from({ length: GRID }, (_, i) => from + ((to - from) * i) / (GRID - 1));
		}
		return 0.5 * (from + to);
	}

	/**
	 * The first two places between which g changes its sign, with nothing but zeros between them. A curve that comes to rest at
	 * the value asked for, or on a plateau, changes no sign: its zeros go on to the end.
	 */
	private crossing(gaps: number[]): [number, number] | null {
		let before = -1;
		for (let i = 0; i < gaps.length; i++) {
			if (gaps[i] === 0) continue;
			if (before >= 0 && this.turns(gaps[before], gaps[i])) return [before, i];
			before = i;
		}
		return null;
	}

	private turns(before: number, after: number): boolean {
		return this.condition.kind === 'slope' ? before > 0 && after < 0 : before > 0 !== after > 0;
	}

	/** g, its derivatives and the value at one time. */
	at(x: Float64Array, time: number): GapAt {
		const { condition } = this;
		const h = DELTA * time;
		const { values, rows } = this.curve(x, [0, time - 2 * h, time - h, time, time + h, time + 2 * h]);
		const p = x.length;
		const base = { value: values[3], valueGradient: rows[3] };
		if (condition.kind === 'slope')
			return {
				...base,
				gap: values[4] - values[2],
				slope: (values[5] - 2 * values[3] + values[1]) / (2 * h),
				gapGradient: Float64Array.from({ length: p }, (_, j) => rows[4][j] - rows[2][j])
			};
		const share = condition.kind === 'share' ? condition.share : 0;
		const level = condition.kind === 'level' ? condition.level : share * values[0];
		return {
			...base,
			gap: values[3] - level,
			slope: (values[4] - values[2]) / (2 * h),
			gapGradient: Float64Array.from({ length: p }, (_, j) => rows[3][j] - share * rows[0][j])
		};
	}
}

const largest = (values: Float64Array): number => values.reduce((top, v) => Math.max(top, Math.abs(v)), 0);
const clear = (gap: number, noise: number): number => (Math.abs(gap) <= noise ? 0 : gap);

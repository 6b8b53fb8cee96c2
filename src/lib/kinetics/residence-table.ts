/**
 * A vessel with a residence-time distribution given as a table, and its first-order sensitivities, analytic.
 *
 *     c = ∫ E(t) e^{Kt} c₀ dt / ∫ E(t) dt             (exact for first-order schemes whatever the micro-mixing)
 *
 * E is straight between its points and zero outside. On each interval [a, b] of length h the integral is exact:
 *
 *     ∫ E c = E(a) e + E(b) l,   e = ∫ (1 − u/h) c du = h z₂,   l = ∫ (u/h) c du = h (z₁ − z₂)
 *
 * with z₁ = ∫c/h, z₂ = ∫∫c/h² by collectors (`augmented.ts`). Derivatives, with A = ∫E dt:
 *
 *     ln k, feed   the same sums of the derivatives of c
 *     E_m          (e_m + l_m − c ∂A/∂E_m)/A
 *     t_m          (−slope_left l − slope_right e − c ∂A/∂t_m)/A,  at the ends with ∓E c besides
 *     all t alike  ∂c/∂ln t = Σ_d ∂c/∂ln k_d               (times and constants enter as products alone)
 *
 * | symbol | name here |
 * | --- | --- |
 * | E | `ResidenceTable.density`, in any unit |
 * | e, l | `early`, `late` |
 * | A | `area` |
 *
 * Source: P. V. Danckwerts, Chem. Eng. Sci. 2 (1953) 1; O. Levenspiel, Chemical Reaction Engineering, 3rd ed. (1999), ch. 11;
 * C. F. Van Loan, IEEE Trans. Automat. Control 23 (1978) 395.
 */
import { withCollectors } from './augmented';
import { innerParameters } from './parameter-sensitivity';
import { Propagator } from './propagator';
import { sensitivities, type SensitivityParameter } from './sensitivity';
import type { LinearSystem } from './types';

/** A measured residence-time distribution: E(t) as straight lines between its points, zero outside. */
export interface ResidenceTable {
	timesS: ArrayLike<number>;
	density: ArrayLike<number>;
}

export type TableParameter =
	/** ln k of a step-direction, or mol/L of a species in the feed. */
	| SensitivityParameter
	/** Density in one row of the table, in its unit. */
	| { kind: 'density'; row: number }
	/** Time of one row, s. */
	| { kind: 'time'; row: number }
	/** ln of all times alike: the mean residence time at the same shape. */
	| { kind: 'ln residence' };

export interface SegregatedFlow {
	/** mol/L at the outlet. */
	outlet: Float64Array;
	/** First moment of the table, s. */
	meanResidenceS: number;
	/** ∫E dt of the table as given, by which it was divided. */
	area: number;
	/** ∂outlet/∂θ, out[p·n + i], for the parameters asked for. */
	sensitivities: Float64Array;
}

/**
 * Outlet of a vessel with a given residence-time distribution.
 * @throws RangeError when the times do not increase, a density is negative, or the area is zero
 */
export function segregatedFlow(
	system: LinearSystem,
	feed: ArrayLike<number>,
	table: ResidenceTable,
	parameters: readonly TableParameter[] = []
): SegregatedFlow {
	const { area, meanResidenceS } = momentsOf(table);
	const walk = walkTable(system, feed, table, parameters);
	const outlet = walk.sum(walk.curve);
	for (let i = 0; i < system.n; i++) outlet[i] /= area;
	const slopes = new Float64Array(parameters.length * system.n);
	parameters.forEach((parameter, p) =>
		slopes.set(bySensitivity(parameter, walk, table, outlet, area), p * system.n)
	);
	return { outlet, meanResidenceS, area, sensitivities: slopes };
}

/** ∫ (1 − u/h) y du and ∫ (u/h) y du over each interval, one array an interval, for some y with n components. */
interface Halves {
	early: Float64Array[];
	late: Float64Array[];
}

interface Walk {
	curve: Halves;
	/** By every inner parameter. */
	derivatives: Halves[];
	inner: SensitivityParameter[];
	first: Float64Array;
	last: Float64Array;
	/** ∫E y dt. */
	sum: (halves: Halves) => Float64Array;
}

function walkTable(
	system: LinearSystem,
	feed: ArrayLike<number>,
	{ timesS, density }: ResidenceTable,
	parameters: readonly TableParameter[]
): Walk {
	const { n } = system;
	const byCurve = parameters.some(
		(p) => p.kind === 'rate' || p.kind === 'charge' || p.kind === 'ln residence'
	);
	const inner = byCurve ? innerParameters(system) : [];
	const plain = new Propagator(system);
	const curve: Halves = { early: [], late: [] };
	const derivatives = inner.map((): Halves => ({ early: [], late: [] }));
	const rates = inner.filter((p) => p.kind === 'rate');
	for (let m = 1; m < timesS.length; m++) {
		const h = timesS[m] - timesS[m - 1];
		const wide = withCollectors(system, h, 2);
		const propagator = new Propagator(wide);
		const start = new Float64Array(3 * n);
		plain.apply(timesS[m - 1], feed, start.subarray(0, n));
		keep(curve, propagator.apply(h, start), h, n);
		if (inner.length === 0) continue;
		const before = sensitivities(system, feed, [timesS[m - 1]], inner).derivatives;
		const inside = sensitivities(wide, start, [h], rates).derivatives;
		inner.forEach((_, p) => {
			const carried = new Float64Array(3 * n);
			carried.set(before.subarray(p * n, (p + 1) * n));
			const moved = propagator.apply(h, carried);
			if (p < rates.length) for (let i = 0; i < 3 * n; i++) moved[i] += inside[p * 3 * n + i];
			keep(derivatives[p], moved, h, n);
		});
	}
	const sum = ({ early, late }: Halves): Float64Array => {
		const total = new Float64Array(n);
		early.forEach((e, m) => {
			for (let i = 0; i < n; i++) total[i] += density[m] * e[i] + density[m + 1] * late[m][i];
		});
		return total;
	};
	const first = plain.apply(timesS[0], feed);
	return { curve, derivatives, inner, first, last: plain.apply(timesS[timesS.length - 1], feed), sum };
}

/** h z₂ and h (z₁ − z₂) in the collectors' own scale. */
function keep({ early, late }: Halves, state: Float64Array, h: number, n: number): void {
	early.push(Float64Array.from({ length: n }, (_, i) => h * state[2 * n + i]));
	late.push(Float64Array.from({ length: n }, (_, i) => h * (state[n + i] - state[2 * n + i])));
}

function bySensitivity(
	parameter: TableParameter,
	walk: Walk,
	table: ResidenceTable,
	outlet: Float64Array,
	area: number
): Float64Array {
	switch (parameter.kind) {
		case 'density':
			return byDensity(parameter.row, walk, table, outlet, area);
		case 'time':
			return byTime(parameter.row, walk, table, outlet, area);
		case 'ln residence': {
			const total = new Float64Array(outlet.length);
			walk.derivatives.forEach((halves, p) => {
				if (walk.inner[p].kind !== 'rate') return;
				walk.sum(halves).forEach((value, i) => (total[i] += value / area));
			});
			return total;
		}
		default: {
			const at = walk.inner.findIndex((q) =>
				parameter.kind === 'charge'
					? q.kind === 'charge' && q.species === parameter.species
					: q.kind === 'rate' && q.step === parameter.step && q.direction === parameter.direction
			);
			return at < 0 ? new Float64Array(outlet.length) : walk.sum(walk.derivatives[at]).map((v) => v / area);
		}
	}
}

function byDensity(
	row: number,
	{ curve }: Walk,
	{ timesS }: ResidenceTable,
	outlet: Float64Array,
	area: number
): Float64Array {
	checkRow(row, timesS.length);
	const left = row > 0 ? timesS[row] - timesS[row - 1] : 0;
	const right = row + 1 < timesS.length ? timesS[row + 1] - timesS[row] : 0;
	return outlet.map((value, i) => {
		const late = row > 0 ? curve.late[row - 1][i] : 0;
		const early = row + 1 < timesS.length ? curve.early[row][i] : 0;
		return (late + early - (value * (left + right)) / 2) / area;
	});
}

function byTime(
	row: number,
	{ curve, first, last }: Walk,
	{ timesS, density }: ResidenceTable,
	outlet: Float64Array,
	area: number
): Float64Array {
	checkRow(row, timesS.length);
	const end = timesS.length - 1;
	const slope = (m: number) => (density[m + 1] - density[m]) / (timesS[m + 1] - timesS[m]);
	let areaSlope = 0;
	if (row > 0) areaSlope += (density[row - 1] + density[row]) / 2;
	if (row < end) areaSlope -= (density[row] + density[row + 1]) / 2;
	return outlet.map((value, i) => {
		let sum = -value * areaSlope;
		if (row > 0) sum -= slope(row - 1) * curve.late[row - 1][i];
		if (row < end) sum -= slope(row) * curve.early[row][i];
		if (row === 0) sum -= density[0] * first[i];
		if (row === end) sum += density[end] * last[i];
		return sum / area;
	});
}

function checkRow(row: number, rows: number): void {
	if (!(Number.isInteger(row) && row >= 0 && row < rows))
		throw new RangeError(`Row ${row + 1} is not in the table, which has ${rows}.`);
}

function momentsOf({ timesS, density }: ResidenceTable): { area: number; meanResidenceS: number } {
	if (timesS.length < 2 || timesS.length !== density.length)
		throw new RangeError(
			`A table needs as many densities as times, at least two; found ${timesS.length} times and ${density.length} densities.`
		);
	let area = 0;
	let moment = 0;
	for (let m = 0; m < timesS.length; m++) {
		if (!(density[m] >= 0) || !(timesS[m] >= 0) || (m > 0 && !(timesS[m] > timesS[m - 1])))
			throw new RangeError(
				`Row ${m + 1} of the table: times from 0 s on that increase and densities of zero or more are expected; found ${timesS[m]} s, ${density[m]}.`
			);
		if (m === 0) continue;
		const [a, b] = [timesS[m - 1], timesS[m]];
		const [ea, eb] = [density[m - 1], density[m]];
		area += ((b - a) * (ea + eb)) / 2;
		moment += ((b - a) * (a * (2 * ea + eb) + b * (ea + 2 * eb))) / 6;
	}
	if (!(area > 0)) throw new RangeError('The table has no area: every density is zero.');
	return { area, meanResidenceS: moment / area };
}

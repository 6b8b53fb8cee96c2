/**
 * From a batch to flow: plug flow, one stirred tank, tanks in series, and any residence-time distribution given as a table.
 *
 *     plug flow           c = e^{Kτ} c₀
 *     stirred tank        c = (I − τK)⁻¹ c₀,   N tanks: c = (I − τK/N)^{−N} c₀
 *     distribution E(t)   c = ∫ E(t) e^{Kt} c₀ dt / ∫ E(t) dt      (exact for first-order schemes whatever the micro-mixing)
 *
 * A tank is a batch in which every species also leaves with 1/τ, collected for ever: c = (1/τ) ∫₀^∞ e^{(K − I/τ)t} c₀ dt, so its
 * composition is a throughput, found by elimination without subtraction (`final-composition.ts`). For E piecewise linear the
 * integral is exact: on [a, b], ∫E c = E(a) z₁ + slope · (h z₁ − z₂) with z₁ = ∫c, z₂ = ∫∫c by collectors (`augmented.ts`).
 *
 * | symbol | name here |
 * | --- | --- |
 * | τ | `residenceS` |
 * | E | `ResidenceTable.density`, in any unit |
 *
 * Source: P. V. Danckwerts, Chem. Eng. Sci. 2 (1953) 1; O. Levenspiel, Chemical Reaction Engineering, 3rd ed. (1999), ch. 8,
 * 11, 14.
 */
import { withCollectors } from './augmented';
import { finalComposition } from './final-composition';
import { Propagator } from './propagator';
import { sensitivities, type SensitivityParameter } from './sensitivity';
import type { LinearSystem } from './types';

/** Outlet of a plug-flow reactor, mol/L. */
export function plugFlow(system: LinearSystem, feed: ArrayLike<number>, residenceS: number): Float64Array {
	checkResidence(residenceS);
	return new Propagator(system).apply(residenceS, feed);
}

/** Outlet of one stirred tank at steady state, mol/L. */
export function stirredTank(system: LinearSystem, feed: ArrayLike<number>, residenceS: number): Float64Array {
	return tanksInSeries(system, feed, residenceS, 1);
}

/** Outlet of `count` equal stirred tanks with `residenceS` over all of them, mol/L. */
export function tanksInSeries(
	system: LinearSystem,
	feed: ArrayLike<number>,
	residenceS: number,
	count: number
): Float64Array {
	checkResidence(residenceS);
	if (!(Number.isInteger(count) && count >= 1))
		throw new RangeError(`A whole number of tanks, one or more, is expected; found ${count}.`);
	let c: Float64Array = Float64Array.from(feed);
	if (residenceS === 0) return c;
	const each = residenceS / count;
	const washed = withWashout(system, each);
	for (let k = 0; k < count; k++) c = throughTank(washed, each, c);
	return c;
}

/**
 * ∂c/∂ln k (or ∂c/∂feed) of the outlet of `count` tanks, mol/L per unit: out[p·n + i]. In each tank
 * s = (I − τK)⁻¹ (s_in + τ ∂K/∂θ c), solved for what the parameter adds and what it takes apart.
 */
export function tankSensitivities(
	system: LinearSystem,
	feed: ArrayLike<number>,
	residenceS: number,
	count: number,
	parameters: readonly SensitivityParameter[]
): Float64Array {
	const { n } = system;
	const each = residenceS / count;
	const washed = withWashout(system, each);
	let c: Float64Array = Float64Array.from(feed);
	// Gains and losses are both non-negative; the sensitivity is their difference.
	let gains: Float64Array[] = parameters.map((p) =>
		Float64Array.from({ length: n }, (_, i) => (p.kind === 'charge' && p.species === i ? 1 : 0))
	);
	let losses: Float64Array[] = parameters.map(() => new Float64Array(n));
	for (let k = 0; k < count; k++) {
		c = throughTank(washed, each, c);
		parameters.forEach((parameter, p) => {
			if (parameter.kind !== 'rate') return;
			const flow = system.flows?.find(
				(f) => f.step === parameter.step && f.direction === parameter.direction
			);
			if (!flow) return;
			losses[p][flow.from] += each * flow.rate * c[flow.from];
			for (const t of system.transfers)
				if (t.step === parameter.step && t.direction === parameter.direction)
					gains[p][t.to] += each * t.rate * t.coefficient * c[t.from];
		});
		gains = gains.map((g) => throughTank(washed, each, g));
		losses = losses.map((l) => throughTank(washed, each, l));
	}
	const out = new Float64Array(parameters.length * n);
	gains.forEach((g, p) => {
		for (let i = 0; i < n; i++) out[p * n + i] = g[i] - losses[p][i];
	});
	return out;
}

function withWashout(system: LinearSystem, tau: number): LinearSystem {
	const { n, transfers, outflow } = system;
	return { n, transfers, outflow: outflow.map((k) => k + 1 / tau) };
}

function throughTank(washed: LinearSystem, tau: number, feed: Float64Array): Float64Array {
	return finalComposition(washed, feed).throughput.map((value) => value / tau);
}

function checkResidence(residenceS: number): void {
	if (!(residenceS >= 0 && Number.isFinite(residenceS)))
		throw new RangeError(`A residence time of 0 s or more is expected; found ${residenceS} s.`);
}

/** A measured residence-time distribution: E(t) as straight lines between its points, zero outside. */
export interface ResidenceTable {
	timesS: ArrayLike<number>;
	density: ArrayLike<number>;
}

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
	parameters: readonly SensitivityParameter[] = []
): SegregatedFlow {
	const { area, meanResidenceS } = momentsOf(table);
	const { n } = system;
	const outlet = new Float64Array(n);
	const slopes = new Float64Array(parameters.length * n);
	const { timesS, density } = table;
	const plain = new Propagator(system);
	for (let m = 1; m < timesS.length; m++) {
		const h = timesS[m] - timesS[m - 1];
		const at = plain.apply(timesS[m - 1], feed);
		const wide = withCollectors(system, h, 2);
		const start = new Float64Array(3 * n);
		start.set(at);
		const end = new Propagator(wide).apply(h, start);
		addInterval(end, 0, outlet, 0, n, (h * density[m - 1]) / area, (h * density[m]) / area);
		if (parameters.length === 0) continue;
		const before = sensitivities(system, feed, [timesS[m - 1]], parameters).derivatives;
		const inside = sensitivities(wide, start, [h], parameters.map(asRate)).derivatives;
		parameters.forEach((parameter, p) => {
			const carried = new Float64Array(3 * n);
			carried.set(before.subarray(p * n, (p + 1) * n));
			const moved = new Propagator(wide).apply(h, carried);
			if (parameter.kind === 'rate') for (let i = 0; i < 3 * n; i++) moved[i] += inside[p * 3 * n + i];
			addInterval(moved, 0, slopes, p * n, n, (h * density[m - 1]) / area, (h * density[m]) / area);
		});
	}
	return { outlet, meanResidenceS, area, sensitivities: slopes };
}

/** A charge has no effect inside an interval beyond what is carried in; a rate that does not exist has none at all. */
const asRate = (parameter: SensitivityParameter): SensitivityParameter =>
	parameter.kind === 'rate' ? parameter : { kind: 'rate', step: -2, direction: 'forward' };

/** Adds E(a) ∫(1 − u/h) c du + E(b) ∫(u/h) c du: h z₂ and h (z₁ − z₂) in the collectors' own scale. */
function addInterval(
	state: Float64Array,
	at: number,
	out: Float64Array,
	place: number,
	n: number,
	early: number,
	late: number
): void {
	for (let i = 0; i < n; i++) {
		const once = state[at + n + i];
		const twice = state[at + 2 * n + i];
		out[place + i] += early * twice + late * (once - twice);
	}
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

/** Residence time at which a species is highest at the outlet of `count` tanks (Infinity: plug flow), with its height. */
export function bestResidence(
	system: LinearSystem,
	feed: ArrayLike<number>,
	species: number,
	count: number
): { residenceS: number; value: number } {
	const propagator = new Propagator(system);
	const height = (lnTau: number) =>
		count === Infinity
			? propagator.apply(Math.exp(lnTau), feed)[species]
			: tanksInSeries(system, feed, Math.exp(lnTau), count)[species];
	const rates = Array.from(system.outflow).filter((k) => k > 0);
	if (rates.length === 0) return { residenceS: 0, value: feed[species] };
	const low = -Math.log(Math.max(...rates)) - 7;
	const high = -Math.log(Math.min(...rates)) + 7;
	const steps = Math.ceil((high - low) / 0.1);
	let best = 0;
	let most = -Infinity;
	for (let k = 0; k <= steps; k++) {
		const value = height(low + (k * (high - low)) / steps);
		if (value > most) [best, most] = [k, value];
	}
	const at = (k: number) => low + (k * (high - low)) / steps;
	const lnTau = goldenSection(height, at(Math.max(0, best - 1)), at(Math.min(steps, best + 1)));
	return { residenceS: Math.exp(lnTau), value: height(lnTau) };
}

function goldenSection(f: (x: number) => number, low: number, high: number): number {
	const ratio = (Math.sqrt(5) - 1) / 2;
	let [a, b] = [high - ratio * (high - low), low + ratio * (high - low)];
	let [fa, fb] = [f(a), f(b)];
	for (let i = 0; i < 60 && high - low > 1e-9; i++) {
		if (fa >= fb) {
			high = b;
			[b, fb] = [a, fa];
			a = high - ratio * (high - low);
			fa = f(a);
		} else {
			low = a;
			[a, fa] = [b, fb];
			b = low + ratio * (high - low);
			fb = f(b);
		}
	}
	return (low + high) / 2;
}

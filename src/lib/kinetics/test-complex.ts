/**
 * Derivatives by a complex step, for tests: an integration of the same physical problem that shares nothing with the engine.
 *
 *     ∂f/∂θ = Im f(θ + i h)/h,  h = 1e-30          no difference is formed, so no digit is lost
 *
 * Each step of a scheme has its law written out in complex numbers; dc/dt = K(T(t)) c + f is integrated by its own Taylor
 * series, with the series of 1/T(t) and of exp(−E/(R T(t))) along a ramp by recurrence, in steps so short that no term grows.
 *
 * Sources: W. Squire and G. Trapp, SIAM Rev. 40 (1998) 110 (complex step); A. Griewank and A. Walther, Evaluating
 * Derivatives, 2nd ed., SIAM 2008, ch. 13 (Taylor coefficients by recurrence).
 */
import type { Network, RateLaw } from './types';

export class Complex {
	constructor(
		readonly re: number,
		readonly im = 0
	) {}
	plus(b: Complex): Complex {
		return new Complex(this.re + b.re, this.im + b.im);
	}
	minus(b: Complex): Complex {
		return new Complex(this.re - b.re, this.im - b.im);
	}
	times(b: Complex): Complex {
		return new Complex(this.re * b.re - this.im * b.im, this.re * b.im + this.im * b.re);
	}
	by(factor: number): Complex {
		return new Complex(this.re * factor, this.im * factor);
	}
	over(b: Complex): Complex {
		const size = b.re * b.re + b.im * b.im;
		return new Complex((this.re * b.re + this.im * b.im) / size, (this.im * b.re - this.re * b.im) / size);
	}
	exp(): Complex {
		const size = Math.exp(this.re);
		return new Complex(size * Math.cos(this.im), size * Math.sin(this.im));
	}
	ln(): Complex {
		return new Complex(Math.log(Math.hypot(this.re, this.im)), Math.atan2(this.im, this.re));
	}
}

/** The step; small enough that its square is lost in rounding. */
export const STEP = 1e-30;
export const real = (value: number): Complex => new Complex(value);
/** The number with the step added: what a derivative is taken by. */
export const stepped = (value: Complex): Complex => new Complex(value.re, value.im + STEP);
export const derivative = (value: Complex): number => value.im / STEP;

export interface ComplexLaw {
	lnK: Complex;
	energy: Complex;
	eyring: boolean;
	orders: { species: string; order: Complex }[];
}

export interface ComplexScheme {
	n: number;
	referenceK: number;
	excess: Record<string, Complex>;
	steps: {
		from: number;
		to: { species: number; coefficient: number }[];
		forward: ComplexLaw;
		reverse: ComplexLaw | { lnEquilibrium: Complex; enthalpy: Complex } | null;
	}[];
}

const R = 8.31446261815324;

/** A network in complex numbers, to be stepped in one of them. */
export function complexScheme(network: Network, excessMolPerL: Record<string, number> = {}): ComplexScheme {
	const at = (id: string) => network.species.findIndex((s) => s.id === id);
	const law = (l: RateLaw): ComplexLaw => ({
		lnK: real(Math.log(l.kRefPerS)),
		energy: real(l.energyJPerMol),
		eyring: l.form === 'eyring',
		orders: l.excess.map((e) => ({ species: e.species, order: real(e.order) }))
	});
	return {
		n: network.species.length,
		referenceK: network.referenceTemperatureK,
		excess: Object.fromEntries(Object.entries(excessMolPerL).map(([id, value]) => [id, real(value)])),
		steps: network.steps.map(({ reactant, products, forward, reverse }) => ({
			from: at(reactant),
			to: products.map((p) => ({ species: at(p.species), coefficient: p.coefficient })),
			forward: law(forward),
			reverse: !reverse
				? null
				: reverse.form === 'equilibrium'
					? { lnEquilibrium: real(Math.log(reverse.kEqRef)), enthalpy: real(reverse.enthalpyJPerMol) }
					: law(reverse)
		}))
	};
}

/** A stretch of time with a linear temperature and constant feeds (per s). */
export interface ComplexPiece {
	durationS: Complex;
	fromK: Complex;
	toK: Complex;
	feed?: Complex[];
	/** Weight of the integral at the start and end of the piece, linear between; 1 where left out. */
	density?: [Complex, Complex];
}

interface Flow {
	from: number;
	to: { species: number; coefficient: number }[];
	/** ln of the constant without its temperature factor. */
	ln: Complex;
	energy: Complex;
	eyring: boolean;
}

function flowsOf(scheme: ComplexScheme): Flow[] {
	const flows: Flow[] = [];
	const ofLaw = (law: ComplexLaw): Complex =>
		law.orders.reduce((sum, o) => sum.plus(o.order.times(scheme.excess[o.species].ln())), law.lnK);
	for (const { from, to, forward, reverse } of scheme.steps) {
		const ln = ofLaw(forward);
		flows.push({ from, to, ln, energy: forward.energy, eyring: forward.eyring });
		if (!reverse) continue;
		const back = { from: to[0].species, to: [{ species: from, coefficient: 1 }] };
		if ('lnK' in reverse)
			flows.push({ ...back, ln: ofLaw(reverse), energy: reverse.energy, eyring: reverse.eyring });
		else
			flows.push({
				...back,
				ln: ln.minus(reverse.lnEquilibrium),
				energy: forward.energy.minus(reverse.enthalpy),
				eyring: forward.eyring
			});
	}
	return flows;
}

const ORDER = 22;

/** Taylor coefficients of one constant about a temperature that changes by `perS`. */
function constantSeries(flow: Flow, referenceK: number, temperatureK: Complex, perS: Complex): Complex[] {
	const ratio = perS.over(temperatureK).by(-1);
	const w: Complex[] = [flow.energy.by(-1 / R).over(temperatureK)];
	for (let m = 1; m <= ORDER; m++) w.push(w[m - 1].times(ratio));
	const k = [
		flow.ln
			.plus(w[0])
			.plus(flow.energy.by(1 / (R * referenceK)))
			.exp()
	];
	for (let m = 0; m < ORDER; m++) {
		let sum = real(0);
		for (let q = 0; q <= m; q++) sum = sum.plus(w[q + 1].by(q + 1).times(k[m - q]));
		k.push(sum.by(1 / (m + 1)));
	}
	if (!flow.eyring) return k;
	return k.map((value, m) =>
		value
			.times(temperatureK)
			.plus(m > 0 ? k[m - 1].times(perS) : real(0))
			.by(1 / referenceK)
	);
}

export interface ComplexResult {
	c: Complex[];
	/** ∫ density · c dt over all pieces. */
	integral: Complex[];
	/** ∫ k c_from dt of each direction, forward then reverse by step. */
	turnover: Complex[];
}

/** Integrates from `start` through the pieces. `events[i]` is added to the state before piece i. */
export function integrateComplex(
	scheme: ComplexScheme,
	pieces: ComplexPiece[],
	start: Complex[],
	events: (Complex[] | undefined)[] = []
): ComplexResult {
	const flows = flowsOf(scheme);
	const state: ComplexResult = {
		c: start.slice(),
		integral: start.map(() => real(0)),
		turnover: flows.map(() => real(0))
	};
	pieces.forEach((piece, i) => {
		events[i]?.forEach((amount, s) => (state.c[s] = state.c[s].plus(amount)));
		throughPiece(scheme, flows, piece, state);
	});
	return state;
}

function throughPiece(
	{ n, referenceK }: ComplexScheme,
	flows: Flow[],
	{ durationS, fromK, toK, feed, density }: ComplexPiece,
	state: ComplexResult
): void {
	const perS = toK.minus(fromK).over(durationS);
	const largest = flows.reduce((sum, flow) => {
		const at = (t: Complex) => constantSeries(flow, referenceK, t, real(0))[0].re;
		const bend = Math.abs((flow.energy.re * perS.re) / (R * Math.min(fromK.re, toK.re) ** 2));
		return Math.max(sum, 3 * Math.max(at(fromK), at(toK)), bend, Math.abs((20 * perS.re) / fromK.re));
	}, 0);
	const steps = Math.max(1, Math.ceil(durationS.re * largest));
	const h = durationS.by(1 / steps);
	const [first, last] = density ?? [real(1), real(1)];
	const rise = last.minus(first).over(durationS);
	for (let q = 0; q < steps; q++) {
		const series = flows.map((flow) =>
			constantSeries(flow, referenceK, fromK.plus(perS.times(h.by(q))), perS)
		);
		const c: Complex[][] = [state.c];
		const turnovers: Complex[][] = [];
		for (let m = 0; m <= ORDER; m++) {
			const next = Array.from({ length: n }, (_, s) => (m === 0 && feed ? feed[s] : real(0)));
			turnovers.push(
				flows.map(({ from, to }, d) => {
					let rate = real(0);
					for (let l = 0; l <= m; l++) rate = rate.plus(series[d][l].times(c[m - l][from]));
					next[from] = next[from].minus(rate);
					for (const p of to) next[p.species] = next[p.species].plus(rate.by(p.coefficient));
					return rate;
				})
			);
			c.push(next.map((value) => value.by(1 / (m + 1))));
		}
		const begin = first.plus(rise.times(h.by(q)));
		let power = real(1);
		const end = Array.from({ length: n }, () => real(0));
		for (let m = 0; m < c.length; m++) {
			const once = power.times(h).by(1 / (m + 1));
			const twice = power
				.times(h)
				.times(h)
				.by(1 / (m + 2));
			for (let s = 0; s < n; s++) {
				end[s] = end[s].plus(c[m][s].times(power));
				state.integral[s] = state.integral[s].plus(c[m][s].times(begin.times(once).plus(rise.times(twice))));
			}
			turnovers[m]?.forEach((rate, d) => (state.turnover[d] = state.turnover[d].plus(rate.times(once))));
			power = power.times(h);
		}
		state.c = end;
	}
}

/** The constants of every direction at one temperature, forward then reverse by step. */
export function complexConstants(scheme: ComplexScheme, temperatureK: number): Complex[] {
	return flowsOf(scheme).map(
		(flow) => constantSeries(flow, scheme.referenceK, real(temperatureK), real(0))[0]
	);
}

/** The composition that solves (I − τK) c = feed, at one temperature. */
export function complexTank(
	scheme: ComplexScheme,
	temperatureK: number,
	tau: Complex,
	feed: Complex[]
): Complex[] {
	const { n } = scheme;
	const a = Array.from({ length: n }, (_, i) =>
		Array.from({ length: n + 1 }, (__, j) => (j === n ? feed[i] : real(i === j ? 1 : 0)))
	);
	for (const flow of flowsOf(scheme)) {
		const k = constantSeries(flow, scheme.referenceK, real(temperatureK), real(0))[0].times(tau);
		a[flow.from][flow.from] = a[flow.from][flow.from].plus(k);
		for (const p of flow.to) a[p.species][flow.from] = a[p.species][flow.from].minus(k.by(p.coefficient));
	}
	// No pivots: the networks of the tests split little, so that the diagonal is large enough.
	for (let i = 0; i < n; i++)
		for (let r = 0; r < n; r++) {
			if (r === i) continue;
			const f = a[r][i].over(a[i][i]);
			for (let j = i; j <= n; j++) a[r][j] = a[r][j].minus(f.times(a[i][j]));
		}
	return a.map((row, i) => row[n].over(row[i]));
}

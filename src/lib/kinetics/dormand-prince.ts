/**
 * The embedded Runge–Kutta pair of order 5(4) with seven stages, for right-hand sides that are not linear.
 *
 * Problem: dy/dt = f(t, y) for a few species over a batch, with a controlled local error: the step is taken with the fifth-order
 * formula, the difference to the fourth-order one steers its length (PI control). Not meant for stiff problems: there the step
 * stays short and the limit on steps ends it with an error instead of a wrong curve.
 *
 * Source: J. R. Dormand and P. J. Prince, J. Comput. Appl. Math. 6 (1980) 19; step control: E. Hairer, S. P. Nørsett and
 * G. Wanner, Solving Ordinary Differential Equations I, 2nd ed. (1993), II.4.
 */

export type RightHandSide = (timeS: number, y: Float64Array, out: Float64Array) => void;

export interface OdeOptions {
	/** Local error allowed per step: relative · |y| + absolute. */
	relative?: number;
	absolute?: number;
	/** Steps after which it gives up. */
	mostSteps?: number;
}

const NODES = [0, 1 / 5, 3 / 10, 4 / 5, 8 / 9, 1, 1];
const STAGES: readonly (readonly number[])[] = [
	[],
	[1 / 5],
	[3 / 40, 9 / 40],
	[44 / 45, -56 / 15, 32 / 9],
	[19372 / 6561, -25360 / 2187, 64448 / 6561, -212 / 729],
	[9017 / 3168, -355 / 33, 46732 / 5247, 49 / 176, -5103 / 18656],
	[35 / 384, 0, 500 / 1113, 125 / 192, -2187 / 6784, 11 / 84]
];
/** Fifth-order weights minus fourth-order ones. */
const ERROR = [71 / 57600, 0, -71 / 16695, 71 / 1920, -17253 / 339200, 22 / 525, -1 / 40];

/**
 * y at each of the times (ascending, from the start on), times-major.
 * @throws RangeError when the limit on steps is reached or the right-hand side is not finite.
 */
export function integrate(
	f: RightHandSide,
	start: ArrayLike<number>,
	timesS: ArrayLike<number>,
	options: OdeOptions = {}
): Float64Array {
	const { relative = 1e-10, absolute = 1e-14, mostSteps = 200_000 } = options;
	const n = start.length;
	const y = Float64Array.from(start);
	const out = new Float64Array(n * timesS.length);
	const k = Array.from({ length: 7 }, () => new Float64Array(n));
	const trial = new Float64Array(n);
	let t = 0;
	let taken = 0;
	let lastError = 1e-4;
	f(t, y, k[0]);
	let h = firstStep(y, k[0], relative, absolute);
	for (let m = 0; m < timesS.length; m++) {
		const end = timesS[m];
		while (t < end) {
			if (++taken > mostSteps)
				throw new RangeError(
					`The integration needs more than ${mostSteps} steps up to ${end} s: the problem is stiff.`
				);
			const last = t + h * (1 + 1e-9) >= end;
			const step = last ? end - t : h;
			const error = attempt(f, t, y, step, k, trial, relative, absolute);
			if (!(error <= 1)) {
				if (Number.isNaN(error) && step < 1e-300) throw new RangeError(`Not a finite rate at ${t} s.`);
				h = step * (Number.isNaN(error) ? 0.1 : Math.max(0.2, 0.9 * error ** -0.2));
				continue;
			}
			t = last ? end : t + step;
			y.set(trial);
			k[0].set(k[6]);
			const factor = 0.9 * Math.max(error, 1e-10) ** -0.17 * lastError ** 0.04;
			lastError = Math.max(error, 1e-4);
			const proposed = step * Math.min(10, Math.max(0.2, factor));
			h = last ? Math.max(h, proposed) : proposed;
		}
		out.set(y, m * n);
	}
	return out;
}

function firstStep(y: Float64Array, slope: Float64Array, relative: number, absolute: number): number {
	let size = 0;
	let speed = 0;
	for (let i = 0; i < y.length; i++) {
		const scale = absolute + relative * Math.abs(y[i]);
		size = Math.max(size, Math.abs(y[i]) / scale);
		speed = Math.max(speed, Math.abs(slope[i]) / scale);
	}
	return speed > 0 && size > 0 ? (0.01 * size * relative ** 0.2) / speed : 1e-6;
}

function attempt(
	f: RightHandSide,
	t: number,
	y: Float64Array,
	h: number,
	k: Float64Array[],
	trial: Float64Array,
	relative: number,
	absolute: number
): number {
	const n = y.length;
	for (let stage = 1; stage < 7; stage++) {
		const weights = STAGES[stage];
		for (let i = 0; i < n; i++) {
			let sum = 0;
			for (let j = 0; j < stage; j++) sum += weights[j] * k[j][i];
			trial[i] = y[i] + h * sum;
		}
		f(t + NODES[stage] * h, trial, k[stage]);
	}
	let worst = 0;
	for (let i = 0; i < n; i++) {
		let difference = 0;
		for (let j = 0; j < 7; j++) difference += ERROR[j] * k[j][i];
		const scale = absolute + relative * Math.max(Math.abs(y[i]), Math.abs(trial[i]));
		const error = Math.abs(h * difference) / scale;
		if (!(error <= worst)) worst = error;
	}
	return worst;
}

/**
 * NIST/ITL Statistical Reference Datasets, nonlinear and linear regression: certified estimates, standard deviations and
 * residual sums of squares, from both certified starts (US government work, public domain).
 */
import { describe, expect, it } from 'vitest';
import { covarianceFromJacobian } from '../../src/lib/kinetics/fit/covariance';
import type { LeastSquaresProblem } from '../../src/lib/kinetics/fit/least-squares';
import { leastSquares } from '../../src/lib/kinetics/fit/levenberg-marquardt';
import { straightLine } from '../../src/lib/kinetics/fit/straight-line';
import boxBod from './c04_nist_BoxBOD.json';
import chwirut1 from './c04_nist_Chwirut1.json';
import chwirut2 from './c04_nist_Chwirut2.json';
import lanczos1 from './c04_nist_Lanczos1.json';
import mgh10 from './c04_nist_MGH10.json';
import misra1a from './c04_nist_Misra1a.json';
import norris from './c04_nist_Norris.json';

type Model = (x: number, b: Float64Array, derivative: Float64Array) => number;

const saturation: Model = (x, b, d) => {
	const e = Math.exp(-b[1] * x);
	d[0] = -Math.expm1(-b[1] * x);
	d[1] = b[0] * x * e;
	return b[0] * d[0];
};
const chwirut: Model = (x, b, d) => {
	const y = Math.exp(-b[0] * x) / (b[1] + b[2] * x);
	d[0] = -x * y;
	d[1] = -y / (b[1] + b[2] * x);
	d[2] = x * d[1];
	return y;
};
const exponentials: Model = (x, b, d) => {
	let y = 0;
	for (let k = 0; k < 6; k += 2) {
		d[k] = Math.exp(-b[k + 1] * x);
		d[k + 1] = -x * b[k] * d[k];
		y += b[k] * d[k];
	}
	return y;
};
const vapour: Model = (x, b, d) => {
	d[0] = Math.exp(b[1] / (x + b[2]));
	const y = b[0] * d[0];
	d[1] = y / (x + b[2]);
	d[2] = (-y * b[1]) / (x + b[2]) ** 2;
	return y;
};

function problem(model: Model, x: number[], y: number[], p: number): LeastSquaresProblem {
	const d = new Float64Array(p);
	return {
		m: x.length,
		p,
		evaluate(b, residuals, jacobian) {
			for (let i = 0; i < x.length; i++) {
				residuals[i] = model(x[i], b, d) - y[i];
				for (let j = 0; j < p; j++) jacobian[j * x.length + i] = d[j];
			}
			return true;
		}
	};
}

const digits = (found: ArrayLike<number>, certified: number[]) =>
	Math.min(...certified.map((c, j) => -Math.log10(Math.max(1e-16, Math.abs(found[j] / c - 1)))));

const sets = [
	{ name: 'Misra1a', set: misra1a, model: saturation },
	{ name: 'BoxBOD', set: boxBod, model: saturation },
	{ name: 'Chwirut1', set: chwirut1, model: chwirut },
	{ name: 'Chwirut2', set: chwirut2, model: chwirut },
	{ name: 'MGH10', set: mgh10, model: vapour },
	{ name: 'Lanczos1', set: lanczos1, model: exponentials }
];

describe.each(sets)('NIST $name', ({ name, set, model }) => {
	it.each(['start1', 'start2'] as const)('reaches the certified estimates from %s', (which) => {
		const start = set.data[which];
		const fit = leastSquares(problem(model, set.data.x, set.data.y, start.length), start, {
			maxEvaluations: 5000
		});
		expect(fit.converged).toBe(true);
		const reached = digits(fit.x, set.expected.parameters.value);
		expect(reached).toBeGreaterThan(8);
		if (name === 'Lanczos1') {
			// Residuals at rounding level: no standard deviation is defined in double precision.
			expect(fit.ssr).toBeLessThan(1e-20);
			return;
		}
		expect(digits([fit.ssr], [set.expected.residual_sum_of_squares.value])).toBeGreaterThan(8);
		const spread = covarianceFromJacobian(fit.jacobian, set.data.x.length, start.length);
		const s = Math.sqrt(fit.ssr / set.expected.dof);
		const errors = spread.errors.map((e) => e * s);
		expect(digits(errors, set.expected.standard_deviations.value)).toBeGreaterThan(7);
		set.expected.correlation.forEach((row, i) =>
			row.forEach((rho, j) => expect(spread.correlation[i][j]).toBeCloseTo(rho, 7))
		);
	});
});

describe('NIST Norris (straight line)', () => {
	it('gives slope, intercept and their standard errors', () => {
		const line = straightLine(norris.data.x, norris.data.y);
		expect(line.slope / norris.expected.B1.value - 1).toBeLessThan(1e-13);
		expect(Math.abs(line.intercept / norris.expected.B0.value - 1)).toBeLessThan(1e-11);
		expect(Math.abs(line.slopeError / norris.expected.se_B1.value - 1)).toBeLessThan(1e-11);
		expect(Math.abs(line.interceptError / norris.expected.se_B0.value - 1)).toBeLessThan(1e-11);
		expect(Math.abs(line.residualSd / norris.expected.residual_sd.value - 1)).toBeLessThan(1e-11);
	});
});

/**
 * A straight line by (weighted) least squares, and the Arrhenius and Eyring lines through given rate constants.
 *
 *     y = a + b x,  b = Σ w (x − x̄)(y − ȳ) / Σ w (x − x̄)²,  se(b) = s/√Σ w (x − x̄)²,  se(a) = s √(1/Σw + x̄²/Σ w (x − x̄)²)
 *     Arrhenius: ln k = ln A − (Ea/R)(1/T);  Eyring: ln(k/T) = ln(k_B/h) + ΔS‡/R − (ΔH‡/R)(1/T)
 *
 * Sources: Draper & Smith, Applied Regression Analysis, 1.4; Schwaab & Pinto, Chem. Eng. Sci. 62 (2007) 2750 (reference
 * temperature 1/mean(1/T), where ln k_ref and Ea are uncorrelated).
 */
import { BOLTZMANN_OVER_PLANCK, GAS_CONSTANT } from '../rate-laws';
import { studentQuantile } from './distributions';

export interface StraightLine {
	slope: number;
	intercept: number;
	slopeError: number;
	interceptError: number;
	/** Correlation of slope and intercept. */
	correlation: number;
	/** s on n − 2 degrees of freedom. */
	residualSd: number;
	degreesOfFreedom: number;
	meanX: number;
	meanY: number;
	/** Σ w (x − x̄)². */
	spreadX: number;
	sumWeights: number;
	residuals: number[];
}

/**
 * Fits y = a + b x.
 * @throws RangeError for fewer than two different x or arrays of unequal length.
 */
export function straightLine(
	x: ArrayLike<number>,
	y: ArrayLike<number>,
	weights?: ArrayLike<number>
): StraightLine {
	const n = x.length;
	if (y.length !== n || (weights && weights.length !== n))
		throw new RangeError(`x, y and weights must be of one length; found ${n}, ${y.length}.`);
	const w = Array.from({ length: n }, (_, i) => weights?.[i] ?? 1);
	const sumWeights = w.reduce((a, b) => a + b, 0);
	const mean = (v: ArrayLike<number>) => w.reduce((a, wi, i) => a + wi * v[i], 0) / sumWeights;
	const meanX = mean(x);
	const meanY = mean(y);
	let spreadX = 0;
	let cross = 0;
	for (let i = 0; i < n; i++) {
		spreadX += w[i] * (x[i] - meanX) ** 2;
		cross += w[i] * (x[i] - meanX) * (y[i] - meanY);
	}
	if (!(spreadX > 0)) throw new RangeError('A line needs at least two different x values.');
	const slope = cross / spreadX;
	const intercept = meanY - slope * meanX;
	const residuals = Array.from({ length: n }, (_, i) => y[i] - meanY - slope * (x[i] - meanX));
	const ssr = residuals.reduce((a, r, i) => a + w[i] * r * r, 0);
	const residualSd = n > 2 ? Math.sqrt(ssr / (n - 2)) : NaN;
	const variance = 1 / sumWeights + (meanX * meanX) / spreadX;
	return {
		slope,
		intercept,
		slopeError: residualSd / Math.sqrt(spreadX),
		interceptError: residualSd * Math.sqrt(variance),
		correlation: -meanX / Math.sqrt(spreadX * variance),
		residualSd,
		degreesOfFreedom: n - 2,
		meanX,
		meanY,
		spreadX,
		sumWeights,
		residuals
	};
}

/** Value of the line at x with the interval of the mean at the given confidence. */
export function lineAt(
	line: StraightLine,
	x: number,
	confidence = 0.95
): { value: number; error: number; interval: [number, number] } {
	const value = line.meanY + line.slope * (x - line.meanX);
	const error = line.residualSd * Math.sqrt(1 / line.sumWeights + (x - line.meanX) ** 2 / line.spreadX);
	const half = studentQuantile(0.5 + confidence / 2, line.degreesOfFreedom) * error;
	return { value, error, interval: [value - half, value + half] };
}

export interface TemperatureLine {
	form: 'arrhenius' | 'eyring';
	/** Ea or ΔH‡, J/mol. */
	energyJPerMol: number;
	energyError: number;
	/** ln A (A in the unit of k), or ΔS‡ in J/(mol·K) for Eyring with k in 1/s. */
	entropyOrLnA: number;
	entropyOrLnAError: number;
	/** 1/mean(1/T): where the constant and the energy are uncorrelated. */
	referenceTemperatureK: number;
	lnKRef: number;
	lnKRefError: number;
	line: StraightLine;
	/** Lowest and highest temperature of the data; outside them a prediction is an extrapolation. */
	studiedK: [number, number];
	/** k at a temperature with its interval, and whether it lies outside the studied range. */
	at(
		temperatureK: number,
		confidence?: number
	): { k: number; interval: [number, number]; extrapolated: boolean };
}

/**
 * Arrhenius or Eyring line through constants at several temperatures (two-stage route; the one-stage fit is the default).
 * @throws RangeError for constants or temperatures that are not positive.
 */
export function temperatureLine(
	temperaturesK: number[],
	constants: number[],
	form: 'arrhenius' | 'eyring' = 'arrhenius',
	weights?: number[]
): TemperatureLine {
	if (![...temperaturesK, ...constants].every((v) => v > 0))
		throw new RangeError('Temperatures (K) and rate constants must be above zero.');
	const x = temperaturesK.map((t) => 1 / t);
	const y = constants.map((k, i) => Math.log(form === 'eyring' ? k / temperaturesK[i] : k));
	const line = straightLine(x, y, weights);
	const reference = 1 / line.meanX;
	const eyring = form === 'eyring';
	const base = eyring ? Math.log(BOLTZMANN_OVER_PLANCK) : 0;
	const studiedK: [number, number] = [Math.min(...temperaturesK), Math.max(...temperaturesK)];
	return {
		form,
		energyJPerMol: -line.slope * GAS_CONSTANT,
		energyError: line.slopeError * GAS_CONSTANT,
		entropyOrLnA: eyring ? (line.intercept - base) * GAS_CONSTANT : line.intercept,
		entropyOrLnAError: line.interceptError * (eyring ? GAS_CONSTANT : 1),
		referenceTemperatureK: reference,
		lnKRef: line.meanY + (eyring ? Math.log(reference) : 0),
		lnKRefError: line.residualSd / Math.sqrt(line.sumWeights),
		line,
		studiedK,
		at(temperatureK, confidence = 0.95) {
			const { value, interval } = lineAt(line, 1 / temperatureK, confidence);
			const factor = eyring ? temperatureK : 1;
			return {
				k: factor * Math.exp(value),
				interval: [factor * Math.exp(interval[0]), factor * Math.exp(interval[1])],
				extrapolated: temperatureK < studiedK[0] - 1e-9 || temperatureK > studiedK[1] + 1e-9
			};
		}
	};
}

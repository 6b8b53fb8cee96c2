/**
 * e^{Kt} c₀ in extended precision, to decide where two ways of solving in double precision disagree, and as the reference of
 * the accuracy figures.
 *
 * Numbers are integers counting units of 2^−bits (fixed point). The rates enter exactly as they are stored and the diagonal
 * is their exact sum. Ordinary Taylor series, scaling and squaring on the signed matrix: with 400 bits (120 digits), 60
 * squarings and the cancellation of stiff schemes leave far more than 60 digits.
 *
 *     E_0 = e^{K h₀} (series, ‖K‖h₀ ≤ 1),  E_{m+1} = E_m²,  c(t) = Π E_m^{bit m of t/h₀} e^{Kr} c₀
 *
 * Deliberately shares no code with the double-precision ways of solving. Slow (milliseconds): never used to draw a curve.
 */
import type { LinearSystem } from './types';

const DEFAULT_BITS = 400;

export class ExtendedPropagator {
	private readonly n: number;
	private readonly bits: bigint;
	private readonly fractionBits: number;
	private readonly flows: { from: number; to: number; rate: bigint }[] = [];
	private readonly baseStepS: number;
	private readonly powers: bigint[][] = [];

	/** @param bits fraction bits; 400 is about 120 decimal digits */
	constructor(system: LinearSystem, bits = DEFAULT_BITS) {
		this.n = system.n;
		this.fractionBits = bits;
		this.bits = BigInt(bits);
		let size = 0;
		for (const k of system.outflow) size = Math.max(size, k);
		for (const { rate, coefficient } of system.transfers) size = Math.max(size, rate * coefficient);
		this.baseStepS = size > 0 ? 2 ** (-3 - Math.ceil(Math.log2(size))) : 1;
		const scaled = (rate: number) => this.fixed(rate * this.baseStepS);
		for (const { from, to, rate, coefficient } of system.transfers)
			this.flows.push({ from, to, rate: (scaled(rate) * this.fixed(coefficient)) >> this.bits });
		if (system.flows)
			for (const { from, rate } of system.flows) this.flows.push({ from, to: from, rate: -scaled(rate) });
		else system.outflow.forEach((rate, i) => this.flows.push({ from: i, to: i, rate: -scaled(rate) }));
	}

	/** c(t), each value the double nearest to the extended result. */
	apply(timeS: number, charge: ArrayLike<number>): Float64Array {
		let vector = Array.from({ length: this.n }, (_, i) => this.fixed(charge[i]));
		let left = timeS;
		for (let level = Math.floor(Math.log2(timeS / this.baseStepS)); level >= 0; level--) {
			const step = this.baseStepS * 2 ** level;
			if (left < step) continue;
			left -= step;
			vector = this.multiply(this.power(level), vector);
		}
		if (left > 0) vector = this.series(this.fixed(left / this.baseStepS), vector, 1);
		return Float64Array.from(vector, (value) => this.toNumber(value));
	}

	private fixed(value: number): bigint {
		if (value === 0) return 0n;
		const exponent = Math.floor(Math.log2(Math.abs(value)));
		const mantissa = BigInt(Math.round(value * 2 ** (52 - exponent)));
		const shift = this.fractionBits + exponent - 52;
		return shift >= 0 ? mantissa << BigInt(shift) : mantissa >> BigInt(-shift);
	}

	private toNumber(value: bigint): number {
		const size = value < 0n ? -value : value;
		const length = size.toString(16).length * 4;
		const drop = Math.max(0, length - 128);
		return Number(value >> BigInt(drop)) * 2 ** (drop - this.fractionBits);
	}

	/** Σ (K h)^m / m! on `columns` columns stored row-major; h in base steps. */
	private series(h: bigint, start: bigint[], columns: number): bigint[] {
		const { n, bits, flows } = this;
		const sum = start.slice();
		let term = start;
		for (let m = 1n; term.some((value) => value !== 0n && value !== -1n); m++) {
			const next: bigint[] = new Array<bigint>(n * columns).fill(0n);
			for (const { from, to, rate } of flows)
				for (let j = 0; j < columns; j++) next[to * columns + j] += rate * term[from * columns + j];
			for (let k = 0; k < next.length; k++) {
				next[k] = (((next[k] >> bits) * h) >> bits) / m;
				sum[k] += next[k];
			}
			term = next;
		}
		return sum;
	}

	private power(level: number): bigint[] {
		const { n } = this;
		if (this.powers.length === 0) {
			const identity = new Array<bigint>(n * n).fill(0n);
			for (let i = 0; i < n; i++) identity[i * n + i] = 1n << this.bits;
			this.powers.push(this.series(1n << this.bits, identity, n));
		}
		while (this.powers.length <= level) this.powers.push(this.squared(this.powers[this.powers.length - 1]));
		return this.powers[level];
	}

	private squared(p: bigint[]): bigint[] {
		const { n, bits } = this;
		const square = new Array<bigint>(n * n).fill(0n);
		for (let i = 0; i < n; i++)
			for (let k = 0; k < n; k++) {
				const factor = p[i * n + k];
				if (factor === 0n) continue;
				for (let j = 0; j < n; j++) square[i * n + j] += factor * p[k * n + j];
			}
		return square.map((value) => value >> bits);
	}

	private multiply(p: bigint[], vector: bigint[]): bigint[] {
		const { n, bits } = this;
		return Array.from({ length: n }, (_, i) => {
			let sum = 0n;
			for (let j = 0; j < n; j++) sum += p[i * n + j] * vector[j];
			return sum >> bits;
		});
	}
}

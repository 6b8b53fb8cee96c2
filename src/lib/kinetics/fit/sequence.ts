/**
 * Seeded numbers: a pseudo-random generator, and a low-discrepancy sequence for starting points.
 *
 * Halton's sequence in prime bases fills a box evenly; digits of each base are permuted by the seed so that high dimensions
 * do not line up. The same seed gives the same bits on every machine (whole-number arithmetic only).
 *
 * Sources: Halton, Numer. Math. 2 (1960) 84; scrambling, Braaten & Weller, J. Comput. Phys. 33 (1979) 249 (the idea; the
 * permutations here come from the seed). Generator: a 32-bit multiply-xor hash of a counter.
 */

/** Uniform numbers in [0, 1) from a 32-bit seed. */
export function uniformNumbers(seed: number): () => number {
	let state = seed >>> 0;
	return () => {
		state = (state + 0x6d2b79f5) >>> 0;
		let z = state;
		z = Math.imul(z ^ (z >>> 15), z | 1);
		z ^= z + Math.imul(z ^ (z >>> 7), z | 61);
		return ((z ^ (z >>> 14)) >>> 0) / 4294967296;
	};
}

function primes(count: number): number[] {
	const found: number[] = [];
	for (let candidate = 2; found.length < count; candidate++)
		if (found.every((p) => candidate % p !== 0)) found.push(candidate);
	return found;
}

function permutation(base: number, random: () => number): number[] {
	const digits = Array.from({ length: base - 1 }, (_, i) => i + 1);
	for (let i = digits.length - 1; i > 0; i--) {
		const j = Math.floor(random() * (i + 1));
		[digits[i], digits[j]] = [digits[j], digits[i]];
	}
	return [0, ...digits];
}

/** Points of the scrambled Halton sequence in the unit cube, from index 1 on. */
export function haltonSequence(dimensions: number, seed: number): (index: number) => Float64Array {
	const random = uniformNumbers(seed);
	const bases = primes(dimensions);
	const permutations = bases.map((base) => permutation(base, random));
	return (index) =>
		Float64Array.from(bases, (base, d) => {
			let value = 0;
			let weight = 1 / base;
			for (let rest = index; rest > 0; rest = Math.floor(rest / base)) {
				value += permutations[d][rest % base] * weight;
				weight /= base;
			}
			return value;
		});
}

/** Standard normal numbers by the polar method (Marsaglia & Bray 1964) from a uniform generator. */
export function normalNumbers(random: () => number): () => number {
	let spare: number | null = null;
	return () => {
		if (spare !== null) {
			const value = spare;
			spare = null;
			return value;
		}
		for (;;) {
			const u = 2 * random() - 1;
			const v = 2 * random() - 1;
			const s = u * u + v * v;
			if (s >= 1 || s === 0) continue;
			const factor = Math.sqrt((-2 * Math.log(s)) / s);
			spare = v * factor;
			return u * factor;
		}
	};
}

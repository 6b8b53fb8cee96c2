/**
 * One point of a profile, and where a profile stands highest between two of them.
 *
 *     τ(u) ≈ cubic with τ(0), τ(1), τ'(0), τ'(1);  d/du = τ'₀ + 2 (3 Δ − 2 τ'₀ − τ'₁) u + 3 (τ'₀ + τ'₁ − 2 Δ) u² = 0,  Δ = τ₁ − τ₀
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | τ, dτ/dθ | `tau`, `slope` |
 * | Δ | `rise` |
 *
 * Source: Hermite's cubic; Nocedal & Wright, Numerical Optimization (2006) 3.5.
 */

/** A value of the parameter with its τ and dτ/dθ, and all parameters there. */
export interface ProfilePoint {
	value: number;
	tau: number;
	slope: number;
	x: Float64Array;
}

/** Where between two points (0 to 1) the cubic through their values and slopes is highest. */
export function topOfCubic(a: ProfilePoint, b: ProfilePoint): number {
	const width = b.value - a.value;
	const [da, db] = [a.slope * width, b.slope * width];
	if (!Number.isFinite(da) || !Number.isFinite(db)) return 0.5;
	const rise = b.tau - a.tau;
	// d/du of the cubic: da + 2 (3 rise − 2 da − db) u + 3 (da + db − 2 rise) u²
	const [p, q, r] = [3 * (da + db - 2 * rise), 2 * (3 * rise - 2 * da - db), da];
	const root = Math.sqrt(Math.max(0, q * q - 4 * p * r));
	const u = p === 0 ? -r / q : (-q - root) / (2 * p);
	return u > 0.05 && u < 0.95 ? u : 0.5;
}

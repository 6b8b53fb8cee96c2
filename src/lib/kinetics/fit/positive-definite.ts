/** Small symmetric positive definite matrices as arrays of rows: Cholesky factor and inverse. Source: Golub & Van Loan, 4.2. */

/** The inverse of a symmetric positive definite matrix (row arrays), or null when it is not positive definite. */
export function invertPositiveDefinite(matrix: number[][]): number[][] | null {
	const factor = cholesky(matrix);
	if (!factor) return null;
	const n = matrix.length;
	const inverse = Array.from({ length: n }, () => new Array<number>(n).fill(0));
	for (let column = 0; column < n; column++) {
		const x = new Array<number>(n).fill(0);
		for (let i = 0; i < n; i++) {
			let sum = i === column ? 1 : 0;
			for (let k = 0; k < i; k++) sum -= factor[i][k] * x[k];
			x[i] = sum / factor[i][i];
		}
		for (let i = n - 1; i >= 0; i--) {
			let sum = x[i];
			for (let k = i + 1; k < n; k++) sum -= factor[k][i] * x[k];
			x[i] = sum / factor[i][i];
		}
		for (let i = 0; i < n; i++) inverse[i][column] = x[i];
	}
	return inverse;
}

/** Lower Cholesky factor of a symmetric matrix (row arrays), or null when it is not positive definite. */
export function cholesky(matrix: number[][]): number[][] | null {
	const n = matrix.length;
	const l = Array.from({ length: n }, () => new Array<number>(n).fill(0));
	for (let i = 0; i < n; i++) {
		for (let j = 0; j <= i; j++) {
			let sum = matrix[i][j];
			for (let k = 0; k < j; k++) sum -= l[i][k] * l[j][k];
			if (i === j) {
				if (!(sum > 0)) return null;
				l[i][i] = Math.sqrt(sum);
			} else l[i][j] = sum / l[j][j];
		}
	}
	return l;
}

/**
 * First-order sensitivities of ∫c dt and of the gross turnover of each step-direction, analytic.
 *
 *     x_d = k_d ∫₀ᵗ c_from dt,   ∂x_d/∂ln k_p = δ_dp x_d + k_d ∂(∫c_from)/∂ln k_p
 *
 * with the derivative of the integral from the system with collectors (`augmented.ts`), differentiated like any other scheme.
 *
 * Source: C. F. Van Loan, IEEE Trans. Automat. Control 23 (1978) 395.
 */
import { withCollectors } from './augmented';
import { sensitivities, type SensitivityParameter } from './sensitivity';
import type { LinearSystem } from './types';

export interface IntegralSensitivities {
	/** ∫₀ᵗ c dt, mol/L·s. */
	integral: Float64Array;
	/** ∂(∫c_i dt)/∂θ_p: [p·n + i], mol/L·s per unit (ln k, or mol/L of the charge). */
	ofIntegral: Float64Array;
	/** Gross turnover of each entry of `system.flows`, mol/L. */
	turnover: Float64Array;
	/** ∂turnover_d/∂θ_p: [p·flows + d], mol/L per unit. */
	ofTurnover: Float64Array;
}

/** @throws RangeError unless the time is finite and above zero. */
export function integralSensitivities(
	system: LinearSystem,
	charge: ArrayLike<number>,
	timeS: number,
	parameters: readonly SensitivityParameter[]
): IntegralSensitivities {
	if (!(timeS > 0 && Number.isFinite(timeS)))
		throw new RangeError(`A time above 0 s is expected; found ${timeS} s.`);
	const { n } = system;
	const flows = system.flows ?? [];
	const start = new Float64Array(2 * n);
	start.set(Float64Array.from(charge));
	const found = sensitivities(withCollectors(system, timeS, 1), start, [timeS], parameters);
	const integral = found.curves.slice(n, 2 * n).map((value) => value * timeS);
	const ofIntegral = new Float64Array(parameters.length * n);
	const turnover = Float64Array.from(flows, ({ from, rate }) => rate * integral[from]);
	const ofTurnover = new Float64Array(parameters.length * flows.length);
	parameters.forEach((parameter, p) => {
		for (let i = 0; i < n; i++) ofIntegral[p * n + i] = timeS * found.derivatives[p * 2 * n + n + i];
		flows.forEach(({ step, direction, from, rate }, d) => {
			const own = parameter.kind === 'rate' && parameter.step === step && parameter.direction === direction;
			ofTurnover[p * flows.length + d] = rate * ofIntegral[p * n + from] + (own ? turnover[d] : 0);
		});
	});
	return { integral, ofIntegral, turnover, ofTurnover };
}

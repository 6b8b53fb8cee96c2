/**
 * Speed of the fit, beside SciPy in the same run where python3 has it, and of a whole fit with many starts and profiles.
 *
 * Alpha-pinene (Fuguitt & Hawkins 1947): five constants from one start, by our Levenberg–Marquardt with analytic derivatives,
 * by `scipy.optimize.least_squares(method="lm")` on curves from one `numpy.linalg.eig`, and on `solve_ivp` (LSODA).
 */
import { fitRequest, type FitRequest } from '../../schemas/fit';
import { fit } from '../fit/fit';
import { KineticModel } from '../fit/model';
import { LeastSquaresWorkspace } from '../fit/least-squares';
import { leastSquares } from '../fit/levenberg-marquardt';
import { compileProblem } from '../fit/problem';
import { normalNumbers, uniformNumbers } from '../fit/sequence';
import { searchBox } from '../fit/starts';

const TIMES = [1230, 3060, 4920, 7800, 10680, 15030, 22620, 36420];
const ROWS = [
	[88.35, 7.3, 2.3, 0.4, 1.75],
	[76.4, 15.6, 4.5, 0.7, 2.8],
	[65.1, 23.1, 5.3, 1.1, 5.8],
	[50.4, 32.9, 6.0, 1.5, 9.3],
	[37.5, 42.7, 6.0, 1.9, 12.0],
	[25.9, 49.1, 5.9, 2.2, 17.0],
	[14.0, 57.4, 5.1, 2.6, 21.0],
	[4.5, 63.1, 3.8, 2.9, 25.7]
];
const START = 1e-4;

const SCIPY = `
import json, sys, time
import numpy as np
from scipy.optimize import least_squares
from scipy.integrate import solve_ivp
data = json.loads(sys.stdin.read())
t = np.array(data["times"]); y = np.array(data["rows"]); repeat = data["repeat"]
c0 = np.array([100.0, 0, 0, 0, 0])
def matrix(k):
    K = np.zeros((5, 5))
    for r, (i, j) in zip(k, [(0, 1), (0, 2), (2, 3), (2, 4), (4, 2)]):
        K[i, i] -= r; K[j, i] += r
    return K
def eig_curves(x):
    w, V = np.linalg.eig(matrix(np.exp(x)))
    return (V @ (np.exp(np.outer(w, t)) * np.linalg.solve(V, c0)[:, None])).T.real
def lsoda_curves(x):
    K = matrix(np.exp(x))
    return solve_ivp(lambda _, c: K @ c, (0, t[-1]), c0, method="LSODA", t_eval=t, rtol=1e-8, atol=1e-8).y.T
x0 = np.full(5, np.log(data["start"]))
def timed(curves, n):
    f = lambda x: (curves(x) - y).ravel()
    best = 1e9
    for _ in range(n):
        a = time.perf_counter(); r = least_squares(f, x0, method="lm"); best = min(best, time.perf_counter() - a)
    return {"ms": best * 1e3, "ssr": float(2 * r.cost), "evaluations": int(r.nfev)}
print(json.dumps({"eig": timed(eig_curves, repeat), "lsoda": timed(lsoda_curves, max(1, repeat // 4))}))
`;

function pinene(): FitRequest {
	const ids = ['A', 'B', 'C', 'D', 'E'];
	const arrows = ['AB', 'AC', 'CD', 'CE', 'EC'];
	return fitRequest.parse({
		species: ids.map((id) => ({ id })),
		steps: arrows.map(([from, to], i) => ({
			id: `s${i + 1}`,
			reactant: from,
			products: [{ species: to }],
			forward: { kRef: { value: START, unit: '1/min' } }
		})),
		referenceTemperature: { value: 189.5, unit: 'degC' },
		runs: [
			{
				temperature: { value: 189.5, unit: 'degC' },
				initial: { A: { value: 100, unit: '%' } },
				timeUnit: 'min',
				channels: ids.map((id) => ({ id, weights: { [id]: 1 }, unit: '%' })),
				timepoints: TIMES.map((time, i) => ({
					time,
					values: Object.fromEntries(ids.map((id, j) => [id, ROWS[i][j]]))
				}))
			}
		]
	});
}

/** Six runs at three temperatures and two charges, 40 times, four species, four steps with constant and energy each. */
export function largeFit(starts: number): FitRequest {
	const normal = normalNumbers(uniformNumbers(11));
	const steps = [
		['A', 'B', 0.9, 70],
		['B', 'C', 0.3, 85],
		['C', 'B', 0.1, 95],
		['A', 'D', 0.08, 110]
	] as const;
	const base = {
		species: ['A', 'B', 'C', 'D'].map((id) => ({ id })),
		referenceTemperature: { value: 45, unit: 'degC' }
	};
	const runs = [30, 45, 60].flatMap((celsius) =>
		[0.5, 1].map((charge) => ({
			temperature: { value: celsius, unit: 'degC' },
			initial: { A: { value: charge, unit: 'mol/L' } },
			timeUnit: 'h' as const,
			channels: ['A', 'B', 'C', 'D'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
			timepoints: Array.from({ length: 40 }, (_, k) => ({
				time: 0.1 * 1.16 ** k,
				values: { A: 0, B: 0, C: 0, D: 0 }
			}))
		}))
	);
	const made = (fitted: boolean) =>
		fitRequest.parse({
			...base,
			steps: steps.map(([from, to, k, ea], i) => ({
				id: `s${i + 1}`,
				reactant: from,
				products: [{ species: to }],
				forward: {
					kRef: { value: fitted ? 0.5 : k, unit: '1/h' },
					activationEnergy: fitted ? { fit: true } : { value: ea, unit: 'kJ/mol' }
				}
			})),
			runs,
			options: { starts, fixed: fitted ? [] : steps.map((_, i) => `s${i + 1}.forward.kRef`) }
		});
	const truth = compileProblem(made(false)).problem!;
	const model = new KineticModel(truth);
	model.evaluate(new Float64Array(0), new Float64Array(model.m), new Float64Array(0));
	const request = made(true);
	truth.points.forEach((point, i) => {
		const { id } = truth.runs[point.run].channels[point.channel];
		request.runs[point.run].timepoints[point.index].values[id] = model.predictions[i] + 0.004 * normal();
	});
	return request;
}

async function scipy(repeat: number): Promise<Record<'eig' | 'lsoda', { ms: number; ssr: number }> | null> {
	const { spawnSync } = await import('node:child_process');
	const run = spawnSync('python3', ['-c', SCIPY], {
		input: JSON.stringify({ times: TIMES, rows: ROWS, start: START, repeat }),
		encoding: 'utf8',
		env: { ...process.env, OMP_NUM_THREADS: '1', OPENBLAS_NUM_THREADS: '1' }
	});
	if (run.status !== 0) return null;
	return JSON.parse(run.stdout) as Record<'eig' | 'lsoda', { ms: number; ssr: number }>;
}

function timePinene(repeat: number): { ms: number; ssr: number; evaluations: number } {
	const problem = compileProblem(pinene()).problem!;
	const model = new KineticModel(problem);
	const box = searchBox(problem);
	const workspace = new LeastSquaresWorkspace(model.m, model.p);
	// The tolerances of SciPy's own default (1e-8), so that both stop at the same place.
	const options = { lower: box.lower, upper: box.upper, ftol: 1e-8, xtol: 1e-8, gtol: 1e-8 };
	let best = Infinity;
	let last = leastSquares(model, box.guess, options, workspace);
	for (let k = 0; k < repeat; k++) {
		const from = performance.now();
		last = leastSquares(model, box.guess, options, workspace);
		best = Math.min(best, performance.now() - from);
	}
	return { ms: best, ssr: last.ssr, evaluations: last.evaluations };
}

/** Runs the comparison and prints one line for each figure. `quick` shortens the repetitions. */
export async function runFitBench(log: (line: string) => void, opts: { quick: boolean }): Promise<void> {
	const ours = timePinene(opts.quick ? 300 : 2000);
	log(
		`alpha-pinene, five constants, one start: ${ours.ms.toFixed(3)} ms (${ours.evaluations} evaluations, SSR ${ours.ssr.toFixed(4)})`
	);
	const theirs = await scipy(opts.quick ? 8 : 20);
	if (theirs) {
		for (const [name, words, asked] of [
			['eig', 'least_squares lm on NumPy eig curves', 15],
			['lsoda', 'least_squares lm on solve_ivp LSODA curves', 100]
		] as const)
			log(
				`  SciPy, ${words}: ${theirs[name].ms.toFixed(2)} ms (SSR ${theirs[name].ssr.toFixed(4)}): ${(theirs[name].ms / ours.ms).toFixed(0)} times ours (asked for: ${asked})`
			);
	} else log('  SciPy is not on this machine: no comparison.');
	const starts = opts.quick ? 10 : 50;
	const request = largeFit(starts);
	fit(request);
	const from = performance.now();
	const report = fit(request);
	log(
		`6 runs × 40 times × 4 species, 8 parameters, ${starts} starts, with profiles: ${((performance.now() - from) / 1000).toFixed(2)} s (${report.evaluations} evaluations, ${report.startsConverged} starts converged; asked for with 50 starts: 2 s)`
	);
}

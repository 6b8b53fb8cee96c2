/**
 * Several solutions that the data cannot tell apart: none is given as the answer, and the one sample that would decide is named.
 *
 * Minima within two units of AICc count as fitting equally well (same parameters, same data: only the misfit differs).
 * Source of the threshold: Burnham & Anderson (2002) 2.6.
 */
import type { FitFinding } from '../../schemas/fit';
import { evaluateLinear } from './affine';
import type { FindingsInput } from './findings';
import type { KineticProblem } from './problem';
import { speciesCurves } from './species-curves';
import { duration, withUnit } from './words';

const EQUAL_AICC = 2;

export function ambiguityFindings(input: FindingsInput): FitFinding[] {
	const { report, problem, outcome } = input;
	const rivals = outcome.minima.slice(1).filter((_, k) => report.alternatives[k].deltaAicc < EQUAL_AICC);
	if (!rivals.length) return otherMinima(input);
	const best = problem.free.map((slot) => {
		const p = report.parameters.find((q) => q.id === slot.id)!;
		return `${slot.id} ${withUnit(p.estimate, p.unit)}`;
	});
	const other = problem.free.map((slot) => {
		const value = report.alternatives[outcome.minima.indexOf(rivals[0]) - 1].parameters[slot.id];
		return `${slot.id} ${withUnit(value, slot.unit)}`;
	});
	const sample = decidingSample(problem, outcome.minima[0].result.x, rivals[0].result.x);
	const words = sample
		? ` One sample would decide: ${sample.species} at ${sample.time} in run ${sample.run} is ${sample.first} of the charge in the first, ${sample.second} in the second.`
		: '';
	return [
		{
			code: 'ambiguous-solutions',
			level: 'stop',
			message: `${rivals.length === 1 ? 'Two' : 'Several'} solutions fit these data equally well, so no single answer is given. First: ${best.join(', ')}. Second: ${other.join(', ')}.${words}`,
			parameters: problem.free.map((s) => s.id)
		}
	];
}

function otherMinima({ report }: FindingsInput): FitFinding[] {
	const near = report.alternatives.filter((a) => a.deltaAicc < 10).length;
	if (!near) return [];
	return [
		{
			code: 'other-minima',
			level: 'note',
			message: `The search also ended in ${near} other minim${near === 1 ? 'um' : 'a'} with a larger misfit (within 10 units of AICc); ${near === 1 ? 'it is' : 'they are'} listed under alternatives.`
		}
	];
}

interface DecidingSample {
	run: string;
	species: string;
	time: string;
	first: string;
	second: string;
}

/** The species and earliest sampled time at which two solutions differ by at least 95 % of their largest difference. */
export function decidingSample(
	problem: KineticProblem,
	a: Float64Array,
	b: Float64Array
): DecidingSample | null {
	const first = speciesCurves(problem, a);
	const second = speciesCurves(problem, b);
	if (!first || !second) return null;
	const n = problem.species.length;
	const candidates = problem.runs.flatMap((run, r) => {
		const charge = run.charge.reduce((sum, c) => sum + Math.abs(evaluateLinear(c, a)), 0) || 1;
		const other = run.charge.reduce((sum, c) => sum + Math.abs(evaluateLinear(c, b)), 0) || 1;
		return Array.from(run.timesS).flatMap((t, k) =>
			problem.species.map((species, i) => {
				const [one, two] = [first[r][k * n + i] / charge, second[r][k * n + i] / other];
				return { run, species, t, one, two, gap: Math.abs(one - two) };
			})
		);
	});
	const largest = Math.max(...candidates.map((c) => c.gap));
	if (!(largest > 0.02)) return null;
	const chosen = candidates.filter((c) => c.gap >= 0.95 * largest).sort((p, q) => p.t - q.t)[0];
	const percent = (v: number) => `${Math.round(100 * v)} %`;
	return {
		run: chosen.run.id,
		species: chosen.species,
		time: duration(chosen.t, chosen.run.timeUnit),
		first: percent(chosen.one),
		second: percent(chosen.two)
	};
}

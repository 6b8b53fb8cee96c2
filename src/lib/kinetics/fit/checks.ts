/**
 * Checks of a compiled request before any search: too few points, energies without temperatures, species that nothing sees.
 */
import type { FitFinding } from '../../schemas/fit';
import type { KineticProblem } from './problem';
import { responseIssues } from './response-rows';

/** Issues of the data beside the parameters; level 'stop' where a fit would be meaningless. */
export function planIssues(problem: KineticProblem): FitFinding[] {
	const responses = problem.request.options.criterion === 'determinant' ? responseIssues(problem) : [];
	return [...countIssues(problem), ...energyIssues(problem), ...unusedParameters(problem), ...responses];
}

function countIssues(problem: KineticProblem): FitFinding[] {
	const p = problem.free.length;
	const n = problem.counted;
	if (p === 0)
		return [
			{
				code: 'nothing-fitted',
				level: 'note',
				message: 'Every parameter is fixed: the curves are shown as they are, nothing is estimated.'
			}
		];
	if (n < p)
		return [
			{
				code: 'too-few-points',
				level: 'stop',
				message: `${n} value${n === 1 ? '' : 's'} cannot determine ${p} parameters. Fix some parameters, or add samples.`
			}
		];
	if (n === p)
		return [
			{
				code: 'no-degrees-of-freedom',
				level: 'caution',
				message: `As many values as parameters (${n}): the curve goes through them whatever the scheme, and no interval can be given.`
			}
		];
	const times = new Set(problem.runs.flatMap((r) => Array.from(r.timesS)));
	if (times.size < 5)
		return [
			{
				code: 'few-times',
				level: 'note',
				message: `Only ${times.size} different times are sampled; five or more are usual.`
			}
		];
	return [];
}

function energyIssues(problem: KineticProblem): FitFinding[] {
	const temperatures = new Set(problem.runs.map((r) => r.temperatureK));
	const varies = temperatures.size > 1 || problem.runs.some((r) => r.log !== null);
	const energies = problem.free.filter((s) => s.kind === 'energy' || s.kind === 'enthalpy');
	const ids = energies.map((s) => s.id);
	if (energies.length && !varies)
		return [
			{
				code: 'one-temperature',
				level: 'stop',
				message: `${ids.join(', ')} cannot be fitted: every run is at ${(problem.runs[0].temperatureK - 273.15).toFixed(1)} °C. Fix the energy, or add runs at other temperatures.`,
				parameters: ids
			}
		];
	if (energies.length && temperatures.size === 2)
		return [
			{
				code: 'two-temperatures',
				level: 'caution',
				message:
					'Two temperatures fix a line but cannot test it: do not extrapolate, and add a third temperature.',
				parameters: ids
			}
		];
	const shared = (step: string) => problem.slots.has(`${step}.forward.kRef`);
	const held = problem.network.steps.filter(
		(s) => shared(s.id) && !problem.slots.has(`${s.id}.forward.activationEnergy`)
	);
	if (varies && held.length)
		return [
			{
				code: 'energy-missing',
				level: 'caution',
				message: `The runs differ in temperature, but step ${held.map((s) => s.id).join(', ')} has no activation energy: its constant is taken as equal at all of them. Let an activation energy be fitted.`
			}
		];
	return [];
}

/** Parameters on which no counted point depends, seen from the topology alone. */
function unusedParameters(problem: KineticProblem): FitFinding[] {
	const used = new Set<number>();
	for (const run of problem.runs) {
		if (run.points.length === 0) continue;
		const reach = reachable(problem, run.index);
		run.lnRates.forEach((l, d) => {
			if (reach.has(run.directions[d].from)) for (const t of l.terms) used.add(t.free);
		});
		for (const l of [...run.charge, run.offset, ...run.channels.map((c) => c.lnResponse)])
			for (const t of l.terms) used.add(t.free);
	}
	// Energies without a spread of temperatures have an issue of their own.
	const ids = problem.free
		.filter((s, j) => !used.has(j) && s.kind !== 'energy' && s.kind !== 'enthalpy')
		.map((s) => s.id);
	if (!ids.length) return [];
	return [
		{
			code: 'parameter-without-effect',
			level: 'stop',
			message: `${ids.join(', ')} has no effect on any sampled value: nothing charged reaches that step. Fix it, or charge what feeds it.`,
			parameters: ids
		}
	];
}

/** Species that the charge of a run reaches. */
function reachable(problem: KineticProblem, runIndex: number): Set<number> {
	const run = problem.runs[runIndex];
	const seen = new Set<number>();
	const queue = run.charge.flatMap((c, i) => (c.constant !== 0 || c.terms.length > 0 ? [i] : []));
	for (let head = 0; head < queue.length; head++) {
		const species = queue[head];
		if (seen.has(species)) continue;
		seen.add(species);
		for (const d of run.directions) if (d.from === species) for (const p of d.products) queue.push(p.to);
	}
	return seen;
}

/** What can be said of identifiability from the scheme and the channels alone. */
export function structuralFindings(problem: KineticProblem): FitFinding[] {
	const seen = new Set(
		problem.runs.flatMap((r) => r.points.flatMap((p) => Array.from(r.channels[p.channel].species)))
	);
	const unseen = problem.species.filter((_, i) => !seen.has(i));
	if (!unseen.length) return [];
	return [
		{
			code: 'species-unobserved',
			level: 'note',
			message: `${unseen.join(', ')} ${unseen.length === 1 ? 'is' : 'are'} not assayed in any run: ${unseen.length === 1 ? 'its' : 'their'} curve follows from the scheme alone.`
		}
	];
}

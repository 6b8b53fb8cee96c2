/**
 * Would a scheme with one step direction less describe the data as well? Asked where a rate constant cannot be told from zero.
 */
import type { FitFinding, FitRequest } from '../../schemas/fit';
import type { FindingsInput } from './findings';
import { watched } from './model';
import { compileProblem } from './problem';
import { searchMinima } from './search';
import { searchBox } from './starts';
import { aicc } from './statistics';
import { figure } from './words';

/** The request without one direction of one step, and without the options that name it. */
export function withoutDirection(request: FitRequest, parameter: string): FitRequest | null {
	const [stepId, sense] = parameter.split('.');
	const step = request.steps.find((s) => s.id === stepId);
	if (!step || (sense === 'forward' && step.reverse)) return null;
	const steps =
		sense === 'reverse'
			? request.steps.map((s) => (s.id === stepId ? { ...s, reverse: null } : s))
			: request.steps.filter((s) => s.id !== stepId);
	const gone = (id: string) => id.startsWith(sense === 'reverse' ? `${stepId}.reverse.` : `${stepId}.`);
	return {
		...request,
		steps,
		options: {
			...request.options,
			...(request.options.local ? { local: request.options.local.filter((id) => !gone(id)) } : {}),
			fixed: request.options.fixed.filter((id) => !gone(id)),
			tied: request.options.tied.filter((t) => !gone(t.parameter) && !gone(t.to)),
			bounds: Object.fromEntries(Object.entries(request.options.bounds).filter(([id]) => !gone(id)))
		}
	};
}

export function simplerScheme({ problem, model, profiles, best, report }: FindingsInput): FitFinding[] {
	if (!profiles || report.aicc === null) return [];
	const findings: FitFinding[] = [];
	problem.free.forEach((slot, j) => {
		if (slot.kind !== 'rate' || profiles[j].lower !== null || findings.length > 2) return;
		const request = withoutDirection(problem.request, slot.id);
		const reduced = request ? compileProblem(request).problem : null;
		if (!reduced || reduced.counted !== problem.counted) return;
		const start = Float64Array.from(
			reduced.free,
			(s) => best.x[problem.free.findIndex((f) => f.id === s.id)]
		);
		const { minima } = searchMinima(watched(reduced, model), searchBox(reduced), [start]);
		const other = minima.length ? aicc(reduced.counted, reduced.free.length, minima[0].result.ssr) : null;
		if (other === null || other > report.aicc! + 2) return;
		findings.push({
			code: 'simpler-scheme',
			level: 'caution',
			message: `A scheme without ${slot.id.replace('.kRef', '').replace('.', ', ')} describes the data as well (AICc ${figure(other - report.aicc!, 2)} against this one): the data do not ask for it.`,
			parameters: [slot.id]
		});
	});
	return findings;
}

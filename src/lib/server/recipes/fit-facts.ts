import type { FitReport, FitRequest } from '$lib/schemas/fit';
import { isFitted } from '$lib/schemas/quantity';
import { inPlainWords } from '$lib/kinetics/parameter-names';
import { toSi } from '$lib/kinetics/units';
import type { Tx } from '../database';
import { Fit, FitRun, Run, RunRevision, Scheme, SchemeVersion } from '../database/models';
import { notFound } from '../errors';
import { isId } from '../ids';
import type { RateForCaution } from '$lib/recipe/cautions';

export interface FitRunFacts {
	runId: string;
	number: number;
	name: string;
	revisionId: string;
	revision: number;
	/** Newer than the one used, when the run was revised since. */
	current: number;
}

export interface FitFacts {
	fit: Fit;
	schemeName: string;
	schemeNumber: number;
	runs: FitRunFacts[];
}

/** Runs behind a fit in their order, each with the revision used and the newest one. */
export async function fitRuns(fitId: string, tx?: Tx): Promise<FitRunFacts[]> {
	const used = await FitRun.findAll({ where: { fitId }, order: [['position', 'ASC']], transaction: tx });
	const [runs, revisions] = await Promise.all([
		Run.findAll({ where: { id: used.map((u) => u.runId) }, transaction: tx }),
		RunRevision.findAll({
			where: { runId: used.map((u) => u.runId) },
			attributes: ['id', 'runId', 'number'],
			transaction: tx
		})
	]);
	return used.flatMap((u) => {
		const run = runs.find((r) => r.id === u.runId);
		const revision = revisions.find((r) => r.id === u.runRevisionId);
		if (!run || !revision) return [];
		const current = revisions.find((r) => r.id === run.currentRevisionId)?.number ?? revision.number;
		return [
			{
				runId: run.id,
				number: run.number,
				name: run.name,
				revisionId: revision.id,
				revision: revision.number,
				current
			}
		];
	});
}

/** A fit of this study with all that a recipe says of it. */
export async function fitFacts(studyId: string, fitId: unknown, tx?: Tx): Promise<FitFacts> {
	const fit = isId(fitId) ? await Fit.findOne({ where: { id: fitId, studyId }, transaction: tx }) : null;
	if (!fit) throw notFound('fit in this study');
	const [schemeVersion, runs] = await Promise.all([
		SchemeVersion.findByPk(fit.schemeVersionId, { transaction: tx }),
		fitRuns(fit.id, tx)
	]);
	const scheme = schemeVersion ? await Scheme.findByPk(schemeVersion.schemeId, { transaction: tx }) : null;
	return {
		fit,
		schemeName: scheme?.name ?? 'Scheme',
		schemeNumber: schemeVersion?.number ?? 1,
		runs
	};
}

/** What the fit found, with runs and constants named as people see them. */
export function findingsInWords(fit: Fit): FitReport['findings'] {
	const runNames = Object.fromEntries(
		fit.request.runs.flatMap(({ id }) => (id ? [[id, id.replace(/^r(\d+)$/, 'run $1')]] : []))
	);
	return fit.report.findings.map((finding) => ({
		...finding,
		message: inPlainWords(finding.message, fit.request, runNames)
	}));
}

const perHour = (value: number, unit: string): number | null => {
	try {
		return toSi({ value, unit }, 'rate constant') * 3600;
	} catch {
		// A constant per concentration of an excess reagent is no first-order constant by itself.
		return null;
	}
};

function energyOf(id: string, request: FitRequest, report: FitReport): number | null {
	const energyId = id.replace(/\.kRef$/, '.activationEnergy');
	const fitted = report.parameters.find((p) => p.id === energyId);
	if (fitted) return toSi({ value: fitted.estimate, unit: fitted.unit }, 'molar energy');
	const [stepId, direction] = id.split('.');
	const step = request.steps.find((s) => s.id === stepId);
	const law = direction === 'forward' ? step?.forward : step?.reverse;
	const given = law && 'activationEnergy' in law ? law.activationEnergy : undefined;
	return given && !isFitted(given) ? toSi(given, 'molar energy') : null;
}

/** The rate constants of a fit as cautions need them, in 1/h at the reference temperature. */
export function ratesOf(request: FitRequest, report: FitReport): RateForCaution[] {
	const referenceC = toSi(request.referenceTemperature, 'temperature') - 273.15;
	return report.parameters.flatMap((p) => {
		if (!p.id.endsWith('.kRef')) return [];
		const value = perHour(p.estimate, p.unit);
		if (value === null) return [];
		// A profile that stays open downwards leaves nothing to rely on: the constant may be zero.
		const lower = p.profileCi95 ? (p.profileCi95[0] ?? 0) : (p.ci95?.[0] ?? null);
		return [
			{
				id: p.id,
				perH: value,
				lowerPerH: lower === null ? null : Math.max(0, perHour(lower, p.unit) ?? 0),
				energyJPerMol: energyOf(p.id, request, report),
				referenceC
			}
		];
	});
}

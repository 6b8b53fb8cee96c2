import { fitOptions, type FitFinding, type FitRequest } from '$lib/schemas/fit';
import type { ParameterSettings } from '$lib/schemas/fit-form';
import type { Quantity } from '$lib/schemas/quantity';
import type { RunContent } from '$lib/schemas/run';
import type { SchemeContent } from '$lib/schemas/scheme';
import { checkNetwork } from '$lib/kinetics/checks';
import { planIssues } from '$lib/kinetics/fit/checks';
import { mayBeLocal } from '$lib/kinetics/fit/local-slots';
import { compileProblem } from '$lib/kinetics/fit/problem';
import { toReported, type Slot } from '$lib/kinetics/fit/slots';
import { toNetwork } from '$lib/kinetics/from-scheme';
import { ENGINE_VERSION } from '$lib/kinetics/version';
import { contentHash } from '../audit/canonical';
import type { Tx } from '../database';
import type { Scheme, SchemeVersion, Study } from '../database/models';
import { AppError, notFound } from '../errors';
import type { Actor } from '../policy';
import { currentRevisions, type RunWithRevision } from '../runs/find';
import { findScheme, findStudy } from '../studies/find';
import { newestVersions } from '../studies/scheme-versions';
import { unopened, withParameterSettings } from './parameter-settings';
import type { ReferenceChoice } from './reference';
import { buildRequest, type EnergiesChoice, type OpenedQuantities } from './request';

export interface PlanFitInput {
	studyId: string;
	schemeId: string;
	runIds: string[];
	/** As `options` of the API; what is left out takes its default. */
	options?: unknown;
	/** Which activation energies are fitted when the runs differ in temperature; those missing, unless said otherwise. */
	energies?: EnergiesChoice;
	/** Reference temperature of a fit over several temperatures. */
	reference?: ReferenceChoice;
	/** Charges and time zero, fitted where asked for. */
	opened?: OpenedQuantities;
	/** Starting and fixed values of single parameters, and what is opened for fitting, by parameter id. */
	settings?: ParameterSettings;
}

export interface PlannedParameter {
	id: string;
	kind: Slot['kind'];
	state: Slot['state'];
	/** Starting or fixed value; null where the fit finds a start by itself. */
	start: Quantity | null;
	tiedTo: string | null;
	/** Factor of the tie. */
	factor: number | null;
	unit: string;
	/** The shared id that it stands in for, where it is local to a run. */
	localOf: string | null;
	/** Whether each run can have a value of its own. */
	mayBeLocal: boolean;
}

export interface PlannedRun {
	id: string;
	/** Id of the run within the request and the report. */
	requestId: string;
	number: number;
	name: string;
	revisionId: string;
	revision: number;
	temperature: Quantity;
	times: number;
	values: number;
	/** Values known only to lie below or above a limit. */
	limits: number;
	excluded: number;
}

export interface FitPlan {
	studyId: string;
	scheme: { id: string; name: string; number: number; versionId: string };
	runs: PlannedRun[];
	parameters: PlannedParameter[];
	/** Quantities that are not parameters of this plan but could be opened: charges, time zeros, response factors. */
	available: PlannedParameter[];
	issues: FitFinding[];
	/** Whether nothing stands in the way of starting. */
	ready: boolean;
	request: FitRequest;
	inputHash: string;
}

const problem = (field: string, message: string): AppError =>
	new AppError('invalid', message, { fields: [{ field, message }] });

function isExcluded(content: RunContent, index: number, channel: string): boolean {
	return (content.exclusions ?? []).some(
		(e) => e.index === index && (e.channel === null || e.channel === channel)
	);
}

/** How many values a run has for a fit. */
export function countValues(
	content: RunContent
): Pick<PlannedRun, 'times' | 'values' | 'limits' | 'excluded'> {
	const counts = { times: content.timepoints.length, values: 0, limits: 0, excluded: 0 };
	content.timepoints.forEach((point, index) => {
		for (const channel of content.channels) {
			const value = point.values[channel.id] ?? null;
			if (value === null) continue;
			if (isExcluded(content, index, channel.id)) counts.excluded++;
			else if (typeof value === 'number') counts.values++;
			else counts.limits++;
		}
	});
	return counts;
}

function plannedRun({ run, revision }: RunWithRevision): PlannedRun {
	return {
		id: run.id,
		requestId: `r${run.number}`,
		number: run.number,
		name: run.name,
		revisionId: revision.id,
		revision: revision.number,
		temperature: revision.content.temperature,
		...countValues(revision.content)
	};
}

const isListed = (slot: Slot): boolean => slot.reported || slot.state !== 'fixed';

const planned = (slot: Slot): PlannedParameter => ({
	id: slot.id,
	kind: slot.kind,
	state: slot.state,
	start: Number.isFinite(slot.value) ? { value: toReported(slot, slot.value), unit: slot.unit } : null,
	tiedTo: slot.tie?.to ?? null,
	factor: slot.tie?.factor ?? null,
	unit: slot.unit,
	localOf: slot.localOf,
	mayBeLocal: slot.localOf !== null || (slot.run === null && mayBeLocal(slot))
});

function availableParameters(slots: Slot[], request: FitRequest): PlannedParameter[] {
	const there = new Set(slots.map((slot) => slot.id));
	const closed = {
		state: 'fixed' as const,
		start: null,
		tiedTo: null,
		factor: null,
		localOf: null,
		mayBeLocal: false
	};
	return [
		...slots.filter((slot) => !isListed(slot)).map(planned),
		...unopened(request)
			.filter(({ id }) => !there.has(id))
			.map((one) => ({ ...one, ...closed }))
	];
}

/** What is wrong with the scheme itself, whatever the runs. */
export function schemeIssues(request: SchemeContent): FitFinding[] {
	const { network } = toNetwork(request);
	return checkNetwork(network).map(({ level, code, message }) => ({ level, code, message }));
}

const LEVELS = ['stop', 'caution', 'note'];

function checkAll(request: FitRequest, first: FitFinding[]) {
	const { problem, slots, issues } = compileProblem(request);
	const ofPlan = problem ? planIssues(problem) : [];
	const all = [...first, ...schemeIssues(request), ...issues, ...ofPlan];
	const each = new Map(all.map((issue) => [`${issue.code} ${issue.message}`, issue]));
	const sorted = [...each.values()].sort((a, b) => LEVELS.indexOf(a.level) - LEVELS.indexOf(b.level));
	return {
		parameters: [...slots.values()].filter(isListed).map(planned),
		available: availableParameters([...slots.values()], request),
		issues: sorted,
		ready: !sorted.some((issue) => issue.level === 'stop')
	};
}

async function chosenScheme(
	actor: Actor,
	study: Study,
	schemeId: string,
	tx?: Tx
): Promise<{ scheme: Scheme; version: SchemeVersion }> {
	const scheme = await findScheme(actor, schemeId, 'study.read', tx);
	const version = (await newestVersions([scheme.id], tx)).get(scheme.id);
	if (scheme.studyId !== study.id || !version) throw notFound('scheme of this study');
	return { scheme, version };
}

/** The plan without the question who may ask for it. */
export async function makePlan(actor: Actor, study: Study, input: PlanFitInput, tx?: Tx): Promise<FitPlan> {
	const runIds = [...new Set(input.runIds)];
	if (runIds.length === 0) throw problem('runIds', 'Choose at least one run.');
	if (runIds.length > 100) throw problem('runIds', 'A fit takes at most 100 runs.');
	const options = fitOptions.parse(input.options ?? {});
	const { scheme, version } = await chosenScheme(actor, study, input.schemeId, tx);
	const chosen = await currentRevisions(study.id, runIds, tx);
	const built = buildRequest(
		version.content,
		chosen.map(({ run, revision }) => ({ number: run.number, content: revision.content })),
		options,
		input.energies,
		input.opened,
		input.reference
	);
	const runs = chosen.map(plannedRun);
	const request = withParameterSettings(built.request, input.settings ?? {});
	const inputHash = contentHash({
		request,
		schemeVersionId: version.id,
		runRevisionIds: runs.map((r) => r.revisionId),
		engineVersion: ENGINE_VERSION
	});
	return {
		studyId: study.id,
		scheme: { id: scheme.id, name: scheme.name, number: version.number, versionId: version.id },
		runs,
		...checkAll(request, built.issues),
		request,
		inputHash
	};
}

/** What a fit of these runs to this scheme would find and hold fixed, and what speaks against it. Nothing is started. */
export async function planFit(actor: Actor, input: PlanFitInput): Promise<FitPlan> {
	const study = await findStudy(actor, input.studyId, 'study.read');
	return makePlan(actor, study, input);
}

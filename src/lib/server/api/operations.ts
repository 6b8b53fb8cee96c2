import type { z } from 'zod';
import { fitRequest } from '$lib/schemas/fit';
import { fitQuestion } from '$lib/schemas/fit-analysis';
import { samplePlanRequest } from '$lib/schemas/fit-plan';
import { fitStart } from '$lib/schemas/fit-start';
import { createRecipeForm } from '$lib/schemas/recipe';
import { confirmRunSchema, sheetWorkSchema } from '$lib/schemas/sheet-work';
import { solveRequest } from '$lib/schemas/solve';
import { studyForm } from '$lib/schemas/study';
import { firstFormRequest } from '$lib/schemas/window';
import type { Scope } from '../policy';
import * as recipe from '../recipes/api-bodies';
import { studyChanges } from '../studies/update-study';
import { changedScheme, newScheme } from './scheme-body';

export type Method = 'get' | 'post' | 'patch' | 'delete';

/** One call of the API; the list of these is what the OpenAPI description and the readable page are made from. */
export interface Operation {
	method: Method;
	/** Path below /api/v1, with its parameters in braces. */
	path: string;
	area: 'Engine' | 'Studies and schemes' | 'Sheets and runs' | 'Fits and windows' | 'Recipes' | 'Audit trail';
	summary: string;
	/** What comes back, in words. */
	gives: string;
	status?: number;
	body?: z.ZodType;
	/** A file in the field `file` instead of JSON. */
	upload?: boolean;
	/** The write names the version that it was made on. */
	versioned?: boolean;
	/** Takes an Idempotency-Key. */
	once?: boolean;
	query?: { name: string; what: string; type: 'string' | 'integer' }[];
	/** Content type of the answer, where it is not JSON. */
	type?: string;
	/** Scope that a token needs; null: no token may. */
	scope: Scope | null;
}

const PAGE: Operation['query'] = [
	{ name: 'after', what: 'id of the last item of the page before', type: 'string' },
	{ name: 'limit', what: 'items a page, 1 to 100', type: 'integer' }
];
const RECIPE_VERSION: Operation['query'] = [
	{ name: 'version', what: 'number of the version; the newest, when left out', type: 'integer' }
];
const WORKBOOK = 'application/vnd.openxmlformats-officedocument.spreadsheetml.sheet';

const ENGINE: Operation[] = [
	{
		method: 'post',
		path: '/kinetics/solve',
		area: 'Engine',
		summary: 'Solve one batch; nothing is kept',
		gives: 'concentrations in the unit of the charge, modes, closed form, method, error estimate, issues',
		body: solveRequest,
		scope: 'read'
	},
	{
		method: 'post',
		path: '/kinetics/fit',
		area: 'Engine',
		summary: 'Fit a small problem of up to 2000 points; nothing is kept',
		gives: 'the full report: parameters with standard errors and intervals, correlation, residuals, findings',
		body: fitRequest,
		scope: 'fit'
	},
	{
		method: 'post',
		path: '/kinetics/sampling-plan',
		area: 'Engine',
		summary: 'Plan the samples of a first run from guessed constants; nothing is kept',
		gives: 'times, expected half-width of each interval, findings',
		body: samplePlanRequest,
		scope: 'read'
	}
];

const STUDIES: Operation[] = [
	{
		method: 'get',
		path: '/groups/{group}/studies',
		area: 'Studies and schemes',
		summary: 'Studies of a lab group, newest first',
		gives: 'items, next, total',
		query: [{ name: 'filter', what: 'words of the name or the decision', type: 'string' }, ...PAGE],
		scope: 'read'
	},
	{
		method: 'post',
		path: '/groups/{group}/studies',
		area: 'Studies and schemes',
		summary: 'New study with its decision and criteria, and a first scheme',
		gives: 'id, version, schemeId',
		status: 201,
		body: studyForm,
		once: true,
		scope: 'write'
	},
	{
		method: 'get',
		path: '/studies/{study}',
		area: 'Studies and schemes',
		summary: 'A study with its criteria, schemes and stations',
		gives: 'study, criteria, schemes, stations',
		scope: 'read'
	},
	{
		method: 'patch',
		path: '/studies/{study}',
		area: 'Studies and schemes',
		summary: 'Change name, decision or criteria',
		gives: 'version, savedAt',
		body: studyChanges,
		versioned: true,
		scope: 'write'
	},
	{
		method: 'post',
		path: '/studies/{study}/schemes',
		area: 'Studies and schemes',
		summary: 'Another candidate scheme',
		gives: 'id, version, number, versionId',
		status: 201,
		body: newScheme,
		once: true,
		scope: 'write'
	},
	{
		method: 'get',
		path: '/schemes/{scheme}',
		area: 'Studies and schemes',
		summary: 'A scheme in its newest version',
		gives: 'name, version, number, content',
		scope: 'read'
	},
	{
		method: 'patch',
		path: '/schemes/{scheme}',
		area: 'Studies and schemes',
		summary: 'Save a scheme; changed content makes a version',
		gives: 'version, number, versionId, savedAt',
		body: changedScheme,
		versioned: true,
		scope: 'write'
	}
];

const DATA: Operation[] = [
	{
		method: 'get',
		path: '/studies/{study}/sheets',
		area: 'Sheets and runs',
		summary: 'Sheets of a study',
		gives: 'items with checksum, open questions and runs',
		scope: 'read'
	},
	{
		method: 'post',
		path: '/studies/{study}/sheets',
		area: 'Sheets and runs',
		summary: 'Upload an assay sheet (.xlsx, .csv, .txt); kept byte for byte',
		gives:
			'checksum, what was read, the queries (Stop, Ask, Note) with their cells; 200 where the same bytes are there already',
		status: 201,
		upload: true,
		once: true,
		scope: 'write'
	},
	{
		method: 'get',
		path: '/sheets/{sheet}',
		area: 'Sheets and runs',
		summary: 'A sheet with its grid and the work on it',
		gives: 'workbook, work, runs, species',
		scope: 'read'
	},
	{
		method: 'patch',
		path: '/sheets/{sheet}',
		area: 'Sheets and runs',
		summary: 'Keep mapping, answers and corrections beside the sheet',
		gives: 'version, savedAt, open',
		body: sheetWorkSchema,
		versioned: true,
		scope: 'write'
	},
	{
		method: 'get',
		path: '/sheets/{sheet}/file',
		area: 'Sheets and runs',
		summary: 'The file byte for byte as received',
		gives: 'the file, with its SHA-256 in Repr-Digest',
		type: 'application/octet-stream',
		scope: 'read'
	},
	{
		method: 'post',
		path: '/sheets/{sheet}/runs',
		area: 'Sheets and runs',
		summary: 'Confirm a table as a run; refused while a Stop or an Ask is open',
		gives: 'id, number, revision, conversions',
		status: 201,
		body: confirmRunSchema,
		once: true,
		scope: 'write'
	},
	{
		method: 'get',
		path: '/studies/{study}/runs',
		area: 'Sheets and runs',
		summary: 'Runs of a study',
		gives: 'items with what each holds',
		scope: 'read'
	},
	{
		method: 'get',
		path: '/runs/{run}',
		area: 'Sheets and runs',
		summary: 'A run with its revisions and the fits that used it',
		gives: 'content, revisions, sheet, fits',
		scope: 'read'
	}
];

const FITS: Operation[] = [
	{
		method: 'get',
		path: '/studies/{study}/fits',
		area: 'Fits and windows',
		summary: 'Every fit of a study, newest first',
		gives: 'items, next',
		query: PAGE,
		scope: 'read'
	},
	{
		method: 'post',
		path: '/studies/{study}/fits',
		area: 'Fits and windows',
		summary: 'Start a recorded fit; equal input gives the fit that is there',
		gives: 'id, reused, events',
		status: 202,
		body: fitStart,
		once: true,
		scope: 'fit'
	},
	{
		method: 'get',
		path: '/fits/{fit}',
		area: 'Fits and windows',
		summary: 'A fit: progress while it runs, then the report',
		gives: 'status, progress, report, request, scheme, runs',
		scope: 'read'
	},
	{
		method: 'get',
		path: '/fits/{fit}/events',
		area: 'Fits and windows',
		summary: 'Numbered events of a fit as Server-Sent Events',
		gives: 'queued, running, progress, then done, failed or cancelled; goes on after Last-Event-ID',
		query: [{ name: 'after', what: 'number of the last event seen', type: 'integer' }],
		type: 'text/event-stream',
		scope: 'read'
	},
	{
		method: 'delete',
		path: '/fits/{fit}',
		area: 'Fits and windows',
		summary: 'Call a fit off; a fit that has ended stays',
		gives: 'id, status',
		scope: 'fit'
	},
	{
		method: 'post',
		path: '/fits/{fit}/questions',
		area: 'Fits and windows',
		summary:
			'A question on a fit, answered from its record: decision quantities, curves, profiles, influence, plans',
		gives: 'answer; times and amounts to decide by come with standard error, t and profile interval',
		body: fitQuestion,
		scope: 'read'
	},
	{
		method: 'get',
		path: '/fits/{fit}/windows',
		area: 'Fits and windows',
		summary: 'Windows that rest on a fit',
		gives: 'items',
		scope: 'read'
	},
	{
		method: 'post',
		path: '/fits/{fit}/windows',
		area: 'Fits and windows',
		summary: 'Compute a window for one temperature and keep it',
		gives: 'id, number, result',
		status: 201,
		body: firstFormRequest,
		once: true,
		scope: 'fit'
	},
	{
		method: 'get',
		path: '/windows/{window}',
		area: 'Fits and windows',
		summary: 'A window with what was asked',
		gives: 'input, result',
		scope: 'read'
	}
];

const change = (
	path: string,
	summary: string,
	body: z.ZodType,
	more: Partial<Operation> = {}
): Operation => ({
	method: 'post',
	path: `/recipes/{recipe}/${path}`,
	area: 'Recipes',
	summary,
	gives: 'the version and its state',
	body,
	scope: 'write',
	...more
});

const RECIPES: Operation[] = [
	{
		method: 'get',
		path: '/studies/{study}/recipes',
		area: 'Recipes',
		summary: 'Recipes of a study',
		gives: 'recipes with their newest version',
		scope: 'read'
	},
	{
		method: 'post',
		path: '/studies/{study}/recipes',
		area: 'Recipes',
		summary: 'A first draft from a fit and a window of it',
		gives: 'id, version',
		status: 201,
		body: createRecipeForm,
		once: true,
		scope: 'write'
	},
	{
		method: 'get',
		path: '/recipes/{recipe}',
		area: 'Recipes',
		summary: 'A recipe in one version',
		gives: 'content, state, signatures, shares',
		query: RECIPE_VERSION,
		scope: 'read'
	},
	{
		method: 'patch',
		path: '/recipes/{recipe}',
		area: 'Recipes',
		summary: 'Save a draft',
		gives: 'version, savedAt',
		body: recipe.patchBody,
		versioned: true,
		scope: 'write'
	},
	change('versions', 'Start a new version, with a reason', recipe.versionBody, { status: 201, once: true }),
	change('submit', 'Submit a draft for review', recipe.submitBody, { versioned: true, once: true }),
	change('comments', 'Comment on a version', recipe.commentBody, { status: 201, once: true }),
	change('return', 'Return a version with a comment', recipe.returnBody, { versioned: true, once: true }),
	change('sign', 'Sign a version; for signed-in people only', recipe.signBody, {
		versioned: true,
		scope: null
	}),
	change('share', 'Share a validated version with another group', recipe.shareBody, {
		status: 201,
		once: true
	}),
	change('withdraw', 'Withdraw a version, with a reason', recipe.withdrawBody, {
		versioned: true,
		once: true
	}),
	{
		method: 'get',
		path: '/recipes/{recipe}/workbook',
		area: 'Recipes',
		summary: 'The QA workbook of a version; recalculates without the service',
		gives: 'the workbook, with its SHA-256 in Repr-Digest',
		query: RECIPE_VERSION,
		type: WORKBOOK,
		scope: 'export'
	}
];

const AUDIT: Operation[] = [
	{
		method: 'get',
		path: '/audit',
		area: 'Audit trail',
		summary: 'Entries of the groups that the caller may inspect, newest first',
		gives: 'items, next',
		query: [
			{ name: 'object', what: 'id of the record', type: 'string' },
			{ name: 'after', what: 'the `next` of the page before', type: 'integer' },
			{ name: 'limit', what: 'entries a page, 1 to 500', type: 'integer' }
		],
		scope: 'read'
	},
	{
		method: 'get',
		path: '/audit/verify',
		area: 'Audit trail',
		summary: 'Goes along the hash chain and names the first entry that does not fit',
		gives: 'whether the chain holds, and where it does not',
		scope: 'read'
	}
];

export const OPERATIONS: Operation[] = [...ENGINE, ...STUDIES, ...DATA, ...FITS, ...RECIPES, ...AUDIT];

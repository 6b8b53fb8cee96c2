import { error, isHttpError, isRedirect, json } from '@sveltejs/kit';
import { randomBytes } from 'node:crypto';
import { ZodError } from 'zod';
import { AppError, type ErrorCode, type FieldProblem } from './errors';
import { log } from './log';

/** Short title of each kind of problem; what is particular to the case stands in `detail`. */
const TITLES: Record<ErrorCode, string> = {
	'not-signed-in': 'Sign in first',
	'not-allowed': 'Not allowed',
	'not-found': 'Not found',
	conflict: 'Conflicts with what is there',
	'version-changed': 'Somebody else saved a newer version',
	'precondition-failed': 'The record has another version',
	'too-large': 'Too large',
	'unsupported-file': 'This file cannot be read',
	invalid: 'Some values are not right',
	'wrong-state': 'Not possible in this state',
	locked: 'Locked for a while',
	'precondition-required': 'The version is missing',
	'too-many-requests': 'Too many requests',
	unavailable: 'Not available at the moment',
	internal: 'Unexpected fault of the service'
};

/** RFC 9457 problem details, with the closed list of codes as an extension member. */
export interface Problem {
	type: string;
	title: string;
	status: number;
	code: ErrorCode;
	detail: string;
	fields?: FieldProblem[];
	data?: Record<string, unknown>;
	errorId?: string;
}

export const newErrorId = (): string => randomBytes(5).toString('hex');

function fieldsOf(caught: ZodError): FieldProblem[] {
	return caught.issues.map((issue) => ({ field: issue.path.join('.'), message: issue.message }));
}

function codeOfStatus(status: number): ErrorCode {
	if (status === 401) return 'not-signed-in';
	if (status === 403) return 'not-allowed';
	if (status === 404) return 'not-found';
	if (status === 413) return 'too-large';
	if (status === 415) return 'unsupported-file';
	if (status === 429) return 'too-many-requests';
	return status < 500 ? 'invalid' : 'internal';
}

/** Something thrown on purpose by SvelteKit itself carries a status and a body. */
function fromKit(caught: unknown): AppError | null {
	if (isHttpError(caught)) return new AppError(codeOfStatus(caught.status), caught.body.message);
	// SvelteKit's adapter throws its own class when a body exceeds the limit.
	if (caught instanceof Error && 'status' in caught && caught.status === 413)
		return new AppError('too-large', 'The request is larger than this service accepts.');
	return null;
}

/** Turns whatever was thrown into the one error type; what was not foreseen is logged with a reference. */
export function toAppError(caught: unknown, where: Record<string, unknown> = {}): AppError {
	if (caught instanceof AppError) {
		if (caught.options.detail) log().info({ ...where, code: caught.code, detail: caught.options.detail });
		return caught;
	}
	if (caught instanceof ZodError) {
		const fields = fieldsOf(caught);
		const first = fields[0];
		const message = first
			? `${first.field ? `${first.field}: ` : ''}${first.message}`
			: 'Some values are not right.';
		return new AppError('invalid', message, { fields });
	}
	const known = fromKit(caught);
	if (known) return known;
	const errorId = newErrorId();
	log().error({ ...where, errorId, err: caught }, 'unexpected error');
	return new AppError(
		'internal',
		`The service met a fault that nobody foresaw. Nothing was saved. Reference for your admin: ${errorId}`,
		{ data: { errorId } }
	);
}

export function problemOf(caught: AppError): Problem {
	const { fields, data } = caught.options;
	const { errorId, ...rest } = data ?? {};
	return {
		type: `/api/v1/docs#${caught.code}`,
		title: TITLES[caught.code],
		status: caught.status,
		code: caught.code,
		detail: caught.message,
		...(fields?.length ? { fields } : {}),
		...(Object.keys(rest).length ? { data: rest } : {}),
		...(typeof errorId === 'string' ? { errorId } : {})
	};
}

export function problemResponse(caught: AppError, headers: Record<string, string> = {}): Response {
	const problem = problemOf(caught);
	const retryAfterS = caught.options.data?.retryAfterS;
	return new Response(JSON.stringify(problem), {
		status: problem.status,
		headers: {
			'content-type': 'application/problem+json',
			'cache-control': 'no-store',
			...(typeof retryAfterS === 'number' ? { 'retry-after': String(Math.ceil(retryAfterS)) } : {}),
			...headers
		}
	});
}

/**
 * Wraps a page's load or action: `export const load = page(async (event: PageServerLoadEvent) => …)`.
 * An AppError becomes SvelteKit's error page with its status, message and code.
 */
export function page<A extends unknown[], R>(
	work: (...args: A) => R | Promise<R>
): (...args: A) => Promise<R> {
	return async (...args) => {
		try {
			return await work(...args);
		} catch (caught) {
			if (isRedirect(caught) || isHttpError(caught)) throw caught;
			const known = toAppError(caught);
			const errorId = known.options.data?.errorId;
			error(known.status, {
				message: known.message,
				code: known.code,
				...(typeof errorId === 'string' ? { id: errorId } : {})
			});
		}
	};
}

/**
 * Wraps a handler of the JSON API: `export const GET = api(async (event: RequestEvent) => …)`.
 * What it returns goes out as JSON unless it is a Response already; what it throws as problem details.
 */
export function api<E extends { request: Request; url: URL }>(
	work: (event: E) => unknown
): (event: E) => Promise<Response> {
	return async (event) => {
		try {
			const result = await work(event);
			if (result instanceof Response) return result;
			if (result === undefined) return new Response(null, { status: 204 });
			return json(result, { headers: { 'cache-control': 'no-store' } });
		} catch (caught) {
			if (isRedirect(caught)) throw caught;
			return problemResponse(toAppError(caught, { method: event.request.method, path: event.url.pathname }));
		}
	};
}

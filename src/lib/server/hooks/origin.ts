import type { Handle } from '@sveltejs/kit';
import { AppError } from '../errors';
import { problemResponse } from '../http';
import { log } from '../log';

const SAFE_METHODS = new Set(['GET', 'HEAD', 'OPTIONS']);
const bareType = (request: Request): string =>
	(request.headers.get('content-type') ?? '').split(';')[0].trim().toLowerCase();

/** Scripts name themselves by a token and bring no cookie, so nobody can ride on a person's session with them. */
export const bearerOf = (request: Request): string | null =>
	/^Bearer\s+(\S+)$/i.exec(request.headers.get('authorization') ?? '')?.[1] ?? null;

/**
 * Whether a request that changes something comes from our own pages. A browser names the origin on every such
 * request; without one, only JSON is taken, which no foreign page can send unasked.
 */
export function comesFromUs(request: Request, origin: string): boolean {
	const from = request.headers.get('origin');
	if (from !== null) return from === origin;
	const site = request.headers.get('sec-fetch-site');
	if (site !== null && site !== 'same-origin') return false;
	const type = bareType(request);
	return type === 'application/json' || (type === '' && !hasBody(request));
}

function hasBody(request: Request): boolean {
	const length = request.headers.get('content-length');
	return request.headers.has('transfer-encoding') || (length !== null && length !== '0');
}

/** The API takes JSON, and multipart for files; nothing that a plain form or text could smuggle in. */
export function takesBody(request: Request): boolean {
	const type = bareType(request);
	if (type === '') return !hasBody(request);
	return (
		type === 'application/json' || type === 'application/merge-patch+json' || type === 'multipart/form-data'
	);
}

/** For every method and content type, in development too: stricter than the framework's own check, which it replaces. */
export const checkOrigin: Handle = async ({ event, resolve }) => {
	const { request, url } = event;
	if (SAFE_METHODS.has(request.method)) return resolve(event);
	const isApi = url.pathname.startsWith('/api/');
	if (!(isApi && bearerOf(request)) && !comesFromUs(request, url.origin)) {
		log().warn(
			{ method: request.method, path: url.pathname, origin: request.headers.get('origin') },
			'foreign origin'
		);
		const refusal = new AppError('not-allowed', 'This request did not come from a page of this service.');
		return isApi ? problemResponse(refusal) : new Response(refusal.message, { status: 403 });
	}
	if (isApi && !takesBody(request))
		return problemResponse(
			new AppError(
				'unsupported-file',
				`The content type "${bareType(request)}" is not taken here; send application/json, or multipart/form-data with a file.`
			)
		);
	return resolve(event);
};

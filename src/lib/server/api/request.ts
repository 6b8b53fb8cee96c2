import type { z } from 'zod';
import { AppError } from '../errors';

type Incoming = Pick<Request, 'headers' | 'json'>;

/** The body as JSON of this schema; a ZodError names the field that does not fit. */
export async function readJson<S extends z.ZodType>(request: Incoming, schema: S): Promise<z.infer<S>> {
	let body: unknown;
	try {
		body = await request.json();
	} catch (caught) {
		if (caught instanceof SyntaxError)
			throw new AppError('invalid', `The body is not valid JSON: ${caught.message}.`);
		throw caught;
	}
	return schema.parse(body);
}

/** Version that an If-Match header names: "3", 3 or W/"3". */
export function ifMatch(headers: Headers): number | null {
	const given = headers.get('if-match')?.trim();
	if (given === undefined) return null;
	const match = /^(?:W\/)?"?(\d{1,9})"?$/.exec(given);
	if (match) return Number(match[1]);
	throw new AppError(
		'precondition-failed',
		`If-Match names one version of the record, for example If-Match: "3"; found ${given.slice(0, 40)}.`
	);
}

/** The version that a write was made on, from If-Match or from the body; a write without one is refused. */
export function requireVersion(headers: Headers, inBody?: number): number {
	const version = ifMatch(headers) ?? inBody;
	if (version === undefined)
		throw new AppError(
			'precondition-required',
			'Name the version that you read: send If-Match: "<version>" with the "version" of the record.'
		);
	return version;
}

/** A number from the query string within its bounds, or the default. */
export function queryNumber(url: URL, name: string, standard: number, [low, high]: [number, number]): number {
	const text = url.searchParams.get(name);
	if (text === null || text === '') return standard;
	const value = Number(text);
	if (Number.isInteger(value) && value >= low && value <= high) return value;
	const message = `${name} must be a whole number from ${low} to ${high}; found ${text.slice(0, 40)}.`;
	throw new AppError('invalid', message, { fields: [{ field: name, message }] });
}

/** JSON answer with status, place and version of what was made or read. */
export function answer(
	body: unknown,
	options: { status?: number; location?: string; version?: number } = {}
): Response {
	const headers: Record<string, string> = { 'cache-control': 'no-store' };
	if (options.location) headers.location = options.location;
	if (options.version !== undefined) headers.etag = `"${options.version}"`;
	return Response.json(body, { status: options.status ?? 200, headers });
}

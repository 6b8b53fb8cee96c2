import type { Actor } from '../../../src/lib/server/policy';

export interface CallOptions {
	actor?: Actor | null;
	params?: Record<string, string>;
	method?: string;
	body?: unknown;
	form?: FormData;
	headers?: Record<string, string>;
	/** Path and query. */
	path?: string;
}

export interface CallAnswer {
	status: number;
	headers: Headers;
	body: unknown;
}

// A handler's event has many members that no handler of ours touches.
type Handler = (event: never) => unknown;

/** What a route handler is given for a request of this person. */
export function eventOf(options: CallOptions) {
	const url = new URL(options.path ?? '/api/v1/test', 'http://localhost:4300');
	const method = options.method ?? (options.body === undefined && !options.form ? 'GET' : 'POST');
	const headers = new Headers(options.headers);
	if (options.body !== undefined) headers.set('content-type', 'application/json');
	const body = options.form ?? (options.body === undefined ? undefined : JSON.stringify(options.body));
	return {
		request: new Request(url, { method, headers, body }),
		url,
		params: options.params ?? {},
		route: { id: url.pathname },
		locals: {
			actor: options.actor ?? null,
			groupId: options.actor?.memberships[0]?.groupId ?? null
		},
		cookies: { get: () => undefined, set: () => undefined, delete: () => undefined },
		setHeaders: () => undefined,
		depends: () => undefined,
		parent: () => Promise.resolve({}),
		getClientAddress: () => '192.0.2.1',
		isDataRequest: false
	};
}

/** Calls a handler of the JSON API as the framework would, and reads its answer. */
export async function call(handler: Handler, options: CallOptions): Promise<CallAnswer> {
	const response = (await handler(eventOf(options) as never)) as Response;
	const text = await response.text();
	const isJson = (response.headers.get('content-type') ?? '').includes('json');
	return {
		status: response.status,
		headers: response.headers,
		body: isJson && text ? (JSON.parse(text) as unknown) : text
	};
}

import { contentHash, sha256 } from '../audit/canonical';
import { write } from '../database';
import { IdempotencyKey } from '../database/models';
import { AppError } from '../errors';
import type { Actor } from '../policy';

const KEY = /^[\x21-\x7e]{8,100}$/;
/** Two equal requests at the same moment: the second waits for the first, then gets its answer. */
const inWork = new Map<string, Promise<unknown>>();

function keyOf(headers: Headers): string | null {
	const key = headers.get('idempotency-key');
	if (key === null) return null;
	if (KEY.test(key)) return key;
	throw new AppError('invalid', 'Idempotency-Key must have 8 to 100 printable characters without spaces.');
}

function replay(found: IdempotencyKey, requestHash: string): Response {
	if (found.requestHash !== requestHash)
		throw new AppError(
			'conflict',
			'This Idempotency-Key was used for another request already. Send a new key with a new request.'
		);
	const { body, location, etag } = found.body as { body: unknown; location?: string; etag?: string };
	return Response.json(body, {
		status: found.status,
		headers: {
			'cache-control': 'no-store',
			'idempotent-replay': 'true',
			...(location ? { location } : {}),
			...(etag ? { etag } : {})
		}
	});
}

async function remember(actor: Actor, key: string, requestHash: string, response: Response): Promise<void> {
	if (response.status >= 300) return;
	const body = {
		body: (await response.clone().json()) as unknown,
		location: response.headers.get('location') ?? undefined,
		etag: response.headers.get('etag') ?? undefined
	};
	await write((tx) =>
		IdempotencyKey.create(
			{ userId: actor.userId, key, requestHash, status: response.status, body },
			{ transaction: tx }
		)
	);
}

/**
 * Runs a write once for each Idempotency-Key of a person: the same request again gets the first answer and changes
 * nothing. Without the header the write simply runs. `content` is what the request says, for telling it from another.
 */
export async function once(
	actor: Actor,
	request: Request,
	content: unknown,
	work: () => Promise<Response>
): Promise<Response> {
	const key = keyOf(request.headers);
	if (key === null) return work();
	const place = `${actor.userId} ${key}`;
	const path = new URL(request.url).pathname;
	const requestHash = sha256(`${request.method} ${path} ${contentHash(content)}`);
	const before = inWork.get(place) ?? Promise.resolve();
	const mine = before
		.catch(() => undefined)
		.then(async () => {
			const found = await IdempotencyKey.findOne({ where: { userId: actor.userId, key } });
			if (found) return replay(found, requestHash);
			const response = await work();
			await remember(actor, key, requestHash, response);
			return response;
		});
	// Taken before anything is awaited, so that an equal request of the same moment finds it.
	inWork.set(place, mine);
	try {
		return await mine;
	} finally {
		if (inWork.get(place) === mine) inWork.delete(place);
	}
}

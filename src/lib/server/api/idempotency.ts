import { contentHash, sha256 } from '../audit/canonical';
import { withFirstWrite, write, type Tx } from '../database';
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
	if (found.status === UNANSWERED)
		throw new AppError(
			'conflict',
			'This request was carried out, but the service stopped before it could keep the answer. Look at what is there; send the request under a new key only if it is missing.'
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

/** The work is done, its answer is not kept yet: the service may stop between the two. */
const UNANSWERED = 0;

interface Keyed {
	userId: string;
	key: string;
	requestHash: string;
}

/** Puts the key beside the first write of the work, so that a repeat after a crash cannot do it twice. */
const reserve =
	(keyed: Keyed) =>
	async (tx: Tx): Promise<void> => {
		await IdempotencyKey.create({ ...keyed, status: UNANSWERED, body: null }, { transaction: tx });
	};

async function keep(keyed: Keyed, response: Response): Promise<void> {
	const body = {
		body: (await response.clone().json()) as unknown,
		location: response.headers.get('location') ?? undefined,
		etag: response.headers.get('etag') ?? undefined
	};
	const { userId, key } = keyed;
	const { status } = response;
	await write(async (tx) => {
		const [kept] = await IdempotencyKey.update({ status, body }, { where: { userId, key }, transaction: tx });
		// Work that wrote nothing has left no key.
		if (kept === 0) await IdempotencyKey.create({ ...keyed, status, body }, { transaction: tx });
	});
}

/** What was refused may be sent again, corrected, under the same key. */
async function release({ userId, key }: Keyed): Promise<void> {
	await write((tx) =>
		IdempotencyKey.destroy({ where: { userId, key, status: UNANSWERED }, transaction: tx })
	);
}

async function workOnce(keyed: Keyed, work: () => Promise<Response>): Promise<Response> {
	const { userId, key, requestHash } = keyed;
	const found = await IdempotencyKey.findOne({ where: { userId, key } });
	if (found) return replay(found, requestHash);
	let response: Response;
	try {
		response = await withFirstWrite(reserve(keyed), work);
	} catch (caught) {
		await release(keyed);
		throw caught;
	}
	await (response.status < 300 ? keep(keyed, response) : release(keyed));
	return response;
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
		.then(() => workOnce({ userId: actor.userId, key, requestHash }, work));
	// Taken before anything is awaited, so that an equal request of the same moment finds it.
	inWork.set(place, mine);
	try {
		return await mine;
	} finally {
		if (inWork.get(place) === mine) inWork.delete(place);
	}
}

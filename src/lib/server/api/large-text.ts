import { promisify } from 'node:util';
import { constants, gzip } from 'node:zlib';

const compress = promisify(gzip);
/** Below this, packing takes longer than it saves. */
const SMALL = 32_768;

const takesGzip = (request: Request): boolean =>
	/\bgzip\b/.test(request.headers.get('accept-encoding') ?? '');

/** JSON that is text already, packed on its way where it is large: off the thread that serves the others. */
export async function jsonText(request: Request, text: string): Promise<Response> {
	const headers: Record<string, string> = {
		'content-type': 'application/json',
		'cache-control': 'no-store',
		vary: 'accept-encoding'
	};
	if (text.length < SMALL || !takesGzip(request)) return new Response(text, { headers });
	// The quickest level: on a fast network the wait for a better one would be longer than what it saves.
	const packed = await compress(text, { level: constants.Z_BEST_SPEED });
	return new Response(new Uint8Array(packed), { headers: { ...headers, 'content-encoding': 'gzip' } });
}

/** Letters that a header may carry as they are; the full name follows in the form of RFC 6266. */
const plain = (name: string): string => name.replace(/[^\w .()+-]/g, '_');

/**
 * A file to be saved, never shown in the browser: sheets come from outside and are handed on as opaque bytes.
 * `digest` is the SHA-256 in hexadecimal.
 */
export function attachment(
	bytes: Uint8Array,
	fileName: string,
	options: { mediaType?: string; digest?: string } = {}
): Response {
	const headers: Record<string, string> = {
		'content-type': options.mediaType ?? 'application/octet-stream',
		'content-length': String(bytes.length),
		'content-disposition': `attachment; filename="${plain(fileName)}"; filename*=UTF-8''${encodeURIComponent(fileName)}`,
		'cache-control': 'no-store'
	};
	if (options.digest)
		headers['repr-digest'] = `sha-256=:${Buffer.from(options.digest, 'hex').toString('base64')}:`;
	return new Response(new Uint8Array(bytes), { headers });
}

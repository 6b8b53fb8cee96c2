import { gunzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { jsonText } from './large-text';

const request = (encoding: string) =>
	new Request('http://localhost/', { headers: { 'accept-encoding': encoding } });
const large = JSON.stringify(Array.from({ length: 20_000 }, (_, i) => i));

describe('large JSON on its way', () => {
	it('is packed for whoever takes it, and is the same text again', async () => {
		const response = await jsonText(request('br, gzip'), large);
		expect(response.headers.get('content-encoding')).toBe('gzip');
		const bytes = new Uint8Array(await response.arrayBuffer());
		expect(bytes.length).toBeLessThan(large.length / 2);
		expect(gunzipSync(bytes).toString()).toBe(large);
	});
	it('stays as it is where it is small or nobody can unpack it', async () => {
		for (const response of [
			await jsonText(request('gzip'), '[1]'),
			await jsonText(request('identity'), large)
		]) {
			expect(response.headers.get('content-encoding')).toBeNull();
			expect(response.headers.get('content-type')).toBe('application/json');
			expect(response.headers.get('cache-control')).toBe('no-store');
		}
	});
});

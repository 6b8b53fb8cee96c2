import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { readWorkbook } from './index';
import { readBytes } from './read';

describe('reading', () => {
	it('reads s02', async () => {
		const b = readFileSync('tests/fixtures/s02_messy.xlsx');
		const t0 = performance.now();
		const w = await readWorkbook(new Uint8Array(b), 's02_messy.xlsx');
		console.log(performance.now() - t0);
		console.log(JSON.stringify(w));
		console.log(JSON.stringify(readBytes(readFileSync('tests/fixtures/s01_clean_50C.csv'), 'a/b/s01.csv')));
	});
});

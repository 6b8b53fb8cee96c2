import { afterEach, describe, expect, it, vi } from 'vitest';
import { readingOf } from './reading-text';

const answers = (...responses: (() => Response)[]) => {
	const fetched = vi.fn(() =>
		Promise.resolve().then(() => responses[Math.min(fetched.mock.calls.length, responses.length) - 1]())
	);
	vi.stubGlobal('fetch', fetched);
	return fetched;
};
afterEach(() => vi.unstubAllGlobals());

describe('the grid of a sheet', () => {
	it('is fetched once while the same sheet is looked at, as text and as a workbook', async () => {
		const fetched = answers(() => Response.json({ fileName: 'run.csv' }));
		const first = await readingOf('study', 'a');
		expect(first).toEqual({ workbook: { fileName: 'run.csv' }, text: '{"fileName":"run.csv"}' });
		expect(await readingOf('study', 'a')).toBe(first);
		expect(fetched).toHaveBeenCalledExactlyOnceWith('/studies/study/data/sheets/a/reading');
		await readingOf('study', 'b');
		expect(fetched).toHaveBeenCalledTimes(2);
	});

	it('that is refused or does not come is said in words, and tried again', async () => {
		const fetched = answers(
			() => Response.json({ detail: 'There is no such sheet.' }, { status: 404 }),
			() => new Response('<html>', { status: 502 }),
			() => {
				throw new TypeError('failed to fetch');
			},
			() => Response.json({ fileName: 'run.csv' })
		);
		expect(await readingOf('study', 'c')).toEqual({ refused: 'There is no such sheet.' });
		expect(JSON.stringify(await readingOf('study', 'c'))).toContain('no readable answer');
		expect(JSON.stringify(await readingOf('study', 'c'))).toContain('no connection');
		expect(await readingOf('study', 'c')).toHaveProperty('workbook');
		expect(fetched).toHaveBeenCalledTimes(4);
	});
});

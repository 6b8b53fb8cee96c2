import { describe, expect, it } from 'vitest';
import { pastedTable } from './upload';

describe('what is pasted', () => {
	it('becomes a table when it has rows and columns, byte for byte', async () => {
		const text = 'Time (h)\tA (mol/L)\r\n0\t0,5\r\n';
		const file = pastedTable(text);
		expect(file?.name).toBe('pasted-table.txt');
		expect(await file!.text()).toBe(text);
	});
	it.each(['', 'HX-14', 'one line\twith a tab', 'two lines\nof prose without columns'])(
		'is no table: %j',
		(text) => {
			expect(pastedTable(text)).toBeNull();
		}
	);
});

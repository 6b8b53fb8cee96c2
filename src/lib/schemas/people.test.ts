import { describe, expect, it } from 'vitest';
import { nameForm } from './people';

const taken = (name: string): boolean => nameForm.safeParse({ name }).success;

describe('a printed name', () => {
	it('may be written in any script', () => {
		for (const name of ['Mira Okafor', 'Zoë Ångström-Łuk', 'مریم می\u200cرود', '山田 花子'])
			expect(taken(name), name).toBe(true);
	});
	it('is one line, and holds no mark that turns the order of letters', () => {
		for (const name of ['Mira\r\nBcc: all', 'Mira\u2028Okafor', 'Mira \u202Erofakl', 'Mira\0'])
			expect(taken(name), JSON.stringify(name)).toBe(false);
	});
});

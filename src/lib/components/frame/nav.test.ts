import { describe, expect, it } from 'vitest';
import { initials, isHere, navItems } from './nav';

describe('the top bar', () => {
	it('shows only what the person may open', () => {
		const reader = navItems({ studies: false, recipes: false, records: false, group: true, admin: false });
		expect(reader.map((i) => i.href)).toEqual(['/shared', '/group']);
	});
	it('marks the section of a page, not one that merely begins alike', () => {
		expect(isHere('/studies/1/scheme', '/studies')).toBe(true);
		expect(isHere('/studies-old', '/studies')).toBe(false);
	});
	it('shortens names', () => {
		expect(initials('Mara Okafor')).toBe('MO');
		expect(initials('Ana Maria de Sá')).toBe('AS');
		expect(initials('Özgür')).toBe('Ö');
		expect(initials(' ')).toBe('?');
	});
});

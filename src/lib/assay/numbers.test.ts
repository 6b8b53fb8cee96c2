import { describe, expect, it } from 'vitest';
import { decide, noVotes, numberText, parseNumber, vote } from './numbers';

describe('numbers as text', () => {
	it.each([
		['12', 12, 12],
		['-0.5', -0.5, null],
		['0,5', null, 0.5],
		['1,234', 1234, 1.234],
		['1.234', 1.234, 1234],
		['0,123', null, 0.123],
		['1.234,5', null, 1234.5],
		['1,234.5', 1234.5, null],
		['1,234,567', 1234567, null],
		['1 234,5', null, 1234.5],
		["1'234.5", 1234.5, null],
		['\u22121.5', -1.5, null],
		['1.5e-3', 0.0015, null],
		['1,5E3', null, 1500],
		['.5', 0.5, null],
		['5.', 5, null],
		['+3', 3, 3],
		['１２', 12, 12]
	])('reads %s as %s with a decimal point and %s with a decimal comma', (text, point, comma) => {
		expect(numberText(text)).toEqual({ point, comma });
	});

	it.each([
		'',
		'-',
		'.',
		',',
		'1.2.3',
		'1,2,3',
		'12 5',
		'1e',
		'0x10',
		'NaN',
		'Infinity',
		'1-2',
		'--1',
		'1 2345',
		'٣'
	])('does not read "%s"', (text) => {
		expect(numberText(text)).toBeNull();
	});

	it('gives no number for a text that reads as two while the convention is open', () => {
		expect(parseNumber('1,234', null)).toBeNull();
		expect(parseNumber('1,234', ',')).toBe(1.234);
		expect(parseNumber('0,5', '.')).toBeNull();
	});
});

describe('the convention of a file', () => {
	const decided = (...texts: string[]) => {
		const votes = noVotes();
		texts.forEach((text, i) => vote(votes, text, `S!A${i + 1}`));
		return decide(votes);
	};

	it('follows the cells that can only be read one way', () => {
		expect(decided('1,234', '0,5', '12')).toEqual({ decimal: ',', trouble: null });
		expect(decided('1,234', '0.5')).toEqual({ decimal: '.', trouble: null });
	});

	it('is open when every cell reads both ways, mixed when cells contradict each other, and free when none has a separator', () => {
		expect(decided('1,234', '2,500')).toEqual({ decimal: null, trouble: 'ambiguous' });
		expect(decided('0,5', '0.5')).toEqual({ decimal: null, trouble: 'mixed' });
		expect(decided('1', 'n.d.', 'A')).toEqual({ decimal: null, trouble: null });
	});
});

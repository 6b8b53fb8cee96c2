import { strToU8 } from 'fflate';
import { describe, expect, it } from 'vitest';
import { SheetRefusal } from './refusal';
import { XmlReader } from './xml';

/** Events of a text fed in pieces of a given size. */
function events(xml: string | Uint8Array, size: number): string[] {
	const seen: string[] = [];
	const reader = new XmlReader(
		'p',
		{
			open: (name, a) =>
				seen.push(
					`<${name}${Object.entries(a)
						.map(([k, v]) => ` ${k}=${v}`)
						.join('')}`
				),
			text: (text) => {
				if (seen.at(-1)?.startsWith('#')) seen[seen.length - 1] += text;
				else seen.push('#' + text);
			},
			close: (name) => seen.push(`/${name}`)
		},
		1000
	);
	const bytes = typeof xml === 'string' ? strToU8(xml) : xml;
	for (let p = 0; p < bytes.length; p += size) reader.write(bytes.subarray(p, p + size));
	reader.finish();
	return seen;
}

describe('the XML reader', () => {
	const xml = `<?xml version="1.0"?>\n<!-- <a> & --><x:a one='1 > 0' two="&lt;&#65;&#x42;&quot;"><b/>t&amp;u<![CDATA[<raw> & ]]>\u00e9 \ud83d\ude00<c >é</c\n></x:a>\n<!-- end -->`;
	const expected = [
		'<a one=1 > 0 two=<AB"',
		'<b',
		'/b',
		'#t&u<raw> & é \ud83d\ude00',
		'<c',
		'#é',
		'/c',
		'/a'
	];

	it('gives the same events however the bytes are cut', () => {
		for (const size of [1, 2, 3, 5, 7, 64, 10_000])
			expect([size, events(xml, size)]).toEqual([size, expected]);
	});

	it.each([
		['no root', '  '],
		['two roots', '<a/><b/>'],
		['text outside the root', '<a/>x'],
		['an unclosed element', '<a><b></a>'],
		['an unclosed root', '<a>'],
		['an unclosed comment', '<a><!-- </a>'],
		['a bare ampersand', '<a>x & y</a>'],
		['an unknown entity', '<a>&nbsp;</a>'],
		['a forbidden character by number', '<a>&#0;</a>'],
		['a surrogate by number', '<a>&#xD800;</a>'],
		['a control character', '<a>\u0001</a>'],
		['an attribute twice', '<a b="1" b="2"/>'],
		['an attribute without quotes', '<a b=1/>'],
		['an opening sign in an attribute', '<a b="<"/>'],
		['a lone slash', '<a / b="1">'],
		['a tag without a name', '<>'],
		['a CDATA section outside the root', '<![CDATA[x]]><a/>'],
		['a tag without end', `<a ${'b'.repeat(200_000)}`],
		['more than 200 attributes', `<a ${Array.from({ length: 201 }, (_, i) => `b${i}="1"`).join(' ')}/>`]
	])('refuses %s', (_, text) => {
		for (const size of [1000, 1_000_000]) expect(() => events(text, size)).toThrow(SheetRefusal);
	});

	it('refuses a document type in any case, and more elements than allowed', () => {
		expect(() => events('<!DOCTYPE a><a/>', 4)).toThrow(/entities/);
		expect(() => events('<!doctype a><a/>', 4)).toThrow(SheetRefusal);
		expect(() => events(`<a>${'<b/>'.repeat(1000)}</a>`, 64)).toThrow(/more than is read/);
	});

	it('treats names such as __proto__ as names', () => {
		expect(events('<__proto__ __proto__="1" constructor="2"/>', 3)).toEqual([
			'<__proto__ __proto__=1 constructor=2',
			'/__proto__'
		]);
		expect(({} as Record<string, unknown>).polluted).toBeUndefined();
	});
});

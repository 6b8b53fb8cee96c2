/** What arrives from outside and means harm, or is broken: each file is refused in words, or read inertly. */
import { readFileSync } from 'node:fs';
import { strToU8, zipSync } from 'fflate';
import { beforeAll, describe, expect, it } from 'vitest';
import { readWorkbook, REFUSAL_CODES, SheetRefusal, type RefusalCode } from './index';
import { LIMITS } from './limits';
import { readBytes } from './read';
import { oneSheet, pack, workbookParts } from './test-workbook';

const row = '<row><c><v>1</v></c></row>';
const sheetPart = (body: string | Uint8Array) => ({ parts: { 'xl/worksheets/sheet1.xml': body } });
const withSheet = (body: string | Uint8Array) => pack(workbookParts([{ rows: [] }], sheetPart(body)));

function refusal(bytes: Uint8Array, name = 'x.xlsx'): { code: RefusalCode; message: string } | 'read' {
	try {
		readBytes(bytes, name);
		return 'read';
	} catch (error) {
		if (!(error instanceof SheetRefusal)) throw error;
		return { code: error.code, message: error.message };
	}
}

const codeOf = (bytes: Uint8Array, name?: string) => {
	const outcome = refusal(bytes, name);
	return outcome === 'read' ? 'read' : outcome.code;
};

/** Sets a 32-bit field of every central directory entry, or of those where it is larger than `above`. */
function setCentral(bytes: Uint8Array, offset: number, value: number, above = -1): Uint8Array {
	const copy = bytes.slice();
	const view = new DataView(copy.buffer);
	for (let i = 0; i + 46 < copy.length; i++)
		if (view.getUint32(i, true) === 0x02014b50 && view.getUint32(i + offset, true) > above)
			view.setUint32(i + offset, value, true);
	return copy;
}

describe('bombs', () => {
	const zeros = new Uint8Array(LIMITS.unfoldedBytes + 1024);
	let honest: Uint8Array;
	beforeAll(() => {
		honest = withSheet(zeros.fill(32));
	});

	it('refuses a part that unfolds beyond the limit, whatever size it declares', () => {
		expect(honest.length).toBeLessThan(200_000);
		expect(codeOf(honest)).toBe('bomb');
		expect(codeOf(setCentral(honest, 24, 1000, 1_000_000))).toBe('bomb');
	});

	it('refuses a zip whose parts together would unfold to more than 256 MB without unfolding any', () => {
		expect(codeOf(setCentral(oneSheet([[1]]), 24, 0x0fff_ffff))).toBe('bomb');
	});

	it('refuses parts that lie over each other', () => {
		const bytes = oneSheet([[1]]);
		const view = new DataView(bytes.buffer);
		const first: number[] = [];
		for (let i = 0; i + 46 < bytes.length; i++) if (view.getUint32(i, true) === 0x02014b50) first.push(i);
		view.setUint32(first[1] + 42, view.getUint32(first[0] + 42, true), true);
		expect(codeOf(bytes)).toBe('bomb');
	});

	it('refuses a short text that four hundred thousand cells repeat', () => {
		const text = 'x'.repeat(30_000);
		const cells = '<c t="s"><v>0</v></c>'.repeat(1000);
		const parts = workbookParts([{ rows: [] }], {
			parts: {
				'xl/worksheets/sheet1.xml': `<worksheet><sheetData>${`<row>${cells}</row>`.repeat(40)}</sheetData></worksheet>`,
				'xl/sharedStrings.xml': `<sst><si><t>${text}</t></si></sst>`
			}
		});
		const rels = String(parts['xl/_rels/workbook.xml.rels']).replace(
			'</Relationships>',
			'<Relationship Id="x" Type="a/sharedStrings" Target="sharedStrings.xml"/></Relationships>'
		);
		expect(codeOf(pack({ ...parts, 'xl/_rels/workbook.xml.rels': rels }))).toBe('too-many-cells');
	});
});

describe('XML that no spreadsheet program writes', () => {
	it.each([
		[
			'entity expansion',
			'<!DOCTYPE x [<!ENTITY a "aaaa"><!ENTITY b "&a;&a;&a;">]><worksheet><sheetData><row><c t="str"><v>&b;</v></c></row></sheetData></worksheet>'
		],
		[
			'an external entity',
			'<!DOCTYPE x [<!ENTITY a SYSTEM "file:///etc/passwd">]><worksheet><sheetData><row><c t="str"><v>&a;</v></c></row></sheetData></worksheet>'
		],
		['an external document type', '<!DOCTYPE worksheet SYSTEM "http://127.0.0.1/x.dtd"><worksheet/>']
	])('refuses %s', (_, xml) => {
		expect(codeOf(withSheet(xml))).toBe('entity-declaration');
	});

	it('refuses undeclared entities, broken XML and endless nesting as damaged', () => {
		expect(
			codeOf(
				withSheet('<worksheet><sheetData><row><c t="str"><v>&xxe;</v></c></row></sheetData></worksheet>')
			)
		).toBe('damaged');
		expect(codeOf(withSheet('<worksheet><sheetData>'))).toBe('damaged');
		expect(codeOf(withSheet('<worksheet>' + '<a>'.repeat(100_000)))).toBe('damaged');
	});
});

describe('packages', () => {
	it.each(['../../evil.xml', '/etc/passwd', 'C:\\x.xml', 'xl\\..\\..\\x', 'xl/../../x'])(
		'refuses a part named %s',
		(name) => {
			expect(codeOf(pack({ ...workbookParts([{ rows: [[1]] }]), [name]: 'x' }))).toBe('path-traversal');
		}
	);

	it('refuses macros, by their part or by the content type', () => {
		expect(codeOf(pack({ ...workbookParts([{ rows: [[1]] }]), 'xl/vbaProject.bin': 'x' }))).toBe(
			'macro-enabled'
		);
		const types =
			'<Types><Override PartName="/xl/workbook.xml" ContentType="application/vnd.ms-excel.sheet.macroEnabled.main+xml"/></Types>';
		expect(codeOf(pack({ ...workbookParts([{ rows: [[1]] }]), '[Content_Types].xml': types }))).toBe(
			'macro-enabled'
		);
	});

	it('refuses links to other files, other formats and other zips, each by its name', () => {
		const base = workbookParts([{ rows: [[1]] }]);
		expect(codeOf(pack({ ...base, 'xl/externalLinks/externalLink1.xml': '<x/>' }))).toBe('external-links');
		expect(
			codeOf(pack({ mimetype: 'application/vnd.oasis.opendocument.spreadsheet', 'content.xml': '<x/>' }))
		).toBe('other-format');
		expect(codeOf(pack({ '[Content_Types].xml': '<Types/>', 'xl/workbook.bin': 'x' }))).toBe('other-format');
		expect(codeOf(pack({ '[Content_Types].xml': '<Types/>', 'word/document.xml': '<x/>' }))).toBe(
			'not-a-sheet'
		);
		expect(codeOf(pack({ 'a.txt': 'x' }))).toBe('not-a-sheet');
	});

	it('refuses password-protected and old-format containers apart from each other', () => {
		const container = (text: string) => {
			const bytes = new Uint8Array(2048);
			bytes.set([0xd0, 0xcf, 0x11, 0xe0, 0xa1, 0xb1, 0x1a, 0xe1]);
			[...text].forEach((c, i) => (bytes[1024 + i * 2] = c.charCodeAt(0)));
			return bytes;
		};
		expect(codeOf(container('EncryptedPackage'))).toBe('encrypted');
		expect(codeOf(container('Workbook'))).toBe('old-format');
		const locked = oneSheet([[1]]);
		const view = new DataView(locked.buffer);
		for (let i = 0; i + 46 < locked.length; i++)
			if (view.getUint32(i, true) === 0x02014b50) view.setUint16(i + 8, 1, true);
		expect(codeOf(locked)).toBe('encrypted');
	});

	it('refuses a package without sheets, a missing part and a part that does not match its checksum', () => {
		const base = workbookParts([{ rows: [[1]] }]);
		expect(codeOf(pack({ ...base, 'xl/workbook.xml': '<workbook><sheets/></workbook>' }))).toBe('damaged');
		const { 'xl/worksheets/sheet1.xml': _sheet, ...rest } = base;
		expect(codeOf(pack(rest))).toBe('damaged');
		expect(codeOf(setCentral(pack(base), 16, 12345))).toBe('damaged');
	});
});

describe('sheets out of bounds', () => {
	it('reads a lone cell at the far corner of the sheet', () => {
		const workbook = readBytes(
			withSheet(
				'<worksheet><sheetData><row r="1048576"><c r="XFD1048576"><v>1</v></c></row></sheetData></worksheet>'
			),
			'x.xlsx'
		);
		expect(workbook.sheets[0]).toMatchObject({
			lastRow: 1_048_576,
			lastColumn: 16_384,
			rows: [{ r: 1_048_576, c: [[16_384, 1]] }]
		});
	});

	it.each([
		['a column beyond XFD', '<row r="1"><c r="XFE1"><v>1</v></c></row>'],
		['a row beyond the last', '<row r="1048577"><c><v>1</v></c></row>'],
		['a row of minus one', '<row r="-1"><c><v>1</v></c></row>'],
		['a row that is there twice', '<row r="3"><c><v>1</v></c></row><row r="3"><c><v>1</v></c></row>'],
		['a number that is none', '<row><c><v>1.2.3</v></c></row>'],
		['a shared text that is not there', '<row><c t="s"><v>7</v></c></row>'],
		['an infinite number', '<row><c><v>1e999</v></c></row>']
	])('refuses %s', (_, rows) => {
		expect(codeOf(withSheet(`<worksheet><sheetData>${rows}</sheetData></worksheet>`))).toBe('damaged');
	});

	it('refuses a million empty formatted rows, and too many cells', () => {
		const empty = `<worksheet><sheetData>${'<row s="1" customFormat="1"/>'.repeat(1_000_000)}</sheetData></worksheet>`;
		expect(codeOf(withSheet(empty))).toBe('too-many-cells');
		const full = `<worksheet><sheetData>${row.repeat(LIMITS.cells + 1)}</sheetData></worksheet>`;
		expect(codeOf(withSheet(full))).toBe('too-many-cells');
	});

	it('refuses text tables beyond the limits and reads one with 16 384 columns', () => {
		expect(codeOf(strToU8('1;2\n'.repeat(LIMITS.cells)), 'x.csv')).toBe('too-many-cells');
		expect(codeOf(strToU8('1;'.repeat(20_000)), 'x.csv')).toBe('too-many-cells');
		expect(codeOf(strToU8('1;'.repeat(16_383) + '1'), 'x.csv')).toBe('read');
	});
});

describe('what is no sheet at all', () => {
	it.each([
		['an empty file', '', 'empty'],
		['blank lines', '\n\n  \n', 'empty'],
		['a PDF', '%PDF-1.7\n%âãÏÓ', 'not-a-sheet'],
		['a web page', '<!DOCTYPE html><html><table><tr><td>1</td></tr></table></html>', 'not-a-sheet'],
		['an RTF document', '{\\rtf1\\ansi', 'not-a-sheet']
	])('refuses %s', (_, text, code) => {
		expect(codeOf(strToU8(text))).toBe(code);
	});

	it('refuses random bytes, pictures and a zip cut short', () => {
		let seed = 7;
		const random = new Uint8Array(5000).map(() => (seed = (seed * 1103515245 + 12345) & 0x7fffffff) >> 8);
		expect(codeOf(random)).toBe('not-a-sheet');
		expect(codeOf(new Uint8Array([0x89, 0x50, 0x4e, 0x47, 1, 2, 3, 0]))).toBe('not-a-sheet');
		const bytes = oneSheet([[1, 2, 3]]);
		for (const cut of [10, 100, bytes.length - 1]) expect(codeOf(bytes.subarray(0, cut))).toBe('damaged');
	});

	it('says what was found and one way out', () => {
		for (const bytes of [strToU8('%PDF-1.7'), oneSheet([[1]]).subarray(0, 50), new Uint8Array()]) {
			const outcome = refusal(bytes);
			expect(outcome === 'read' ? '' : outcome.message).toMatch(/expected|Save|Open it/);
		}
	});
});

describe('in the worker', () => {
	it('gives the same refusal, and its siblings are read all the same', async () => {
		const good = oneSheet([
			['t (h)', 'A'],
			[0, 1]
		]);
		const bad = withSheet('<!DOCTYPE x><worksheet/>');
		const outcomes = await Promise.allSettled(
			Array.from({ length: 12 }, (_, i) => readWorkbook(i % 3 === 0 ? bad : good, 'x.xlsx'))
		);
		outcomes.forEach((o, i) => {
			if (i % 3 === 0)
				expect(o.status === 'rejected' && (o.reason as SheetRefusal).code).toBe('entity-declaration');
			else expect(o.status === 'fulfilled' && o.value.sheets[0].rows).toHaveLength(2);
		});
	});

	it('stops a reading that takes too long', async () => {
		const slow = withSheet(`<worksheet><sheetData>${row.repeat(300_000)}</sheetData></worksheet>`);
		await expect(readWorkbook(slow, 'x.xlsx', { timeoutMs: 1 })).rejects.toMatchObject({ code: 'timeout' });
	});
});

describe('mutations of real workbooks', () => {
	const originals = [
		new Uint8Array(readFileSync(new URL('../../../../../tests/fixtures/s02_messy.xlsx', import.meta.url))),
		oneSheet(
			[
				['t (h)', 'A (mol/L)'],
				[0, 0.5],
				[1, 0.25]
			],
			{ merges: ['A1:A2'] }
		),
		strToU8('t (h);A (mol/L)\n0;0,5\n1;"0,25"\n')
	];
	/** A fixed generator (Park and Miller 1988), so that a failure can be repeated. */
	const generator = (seed: number) => () => (seed = (seed * 48271) % 2147483647) / 2147483647;

	it('are read or refused with a code of the list, never anything else, over 1 500 rounds', () => {
		const random = generator(20261201);
		const codes = new Set<string>();
		for (let round = 0; round < 1500; round++) {
			const bytes = originals[round % originals.length].slice();
			const edits = 1 + Math.floor(random() * 8);
			for (let i = 0; i < edits; i++) bytes[Math.floor(random() * bytes.length)] = Math.floor(random() * 256);
			const cut = random() < 0.2 ? bytes.subarray(0, Math.floor(random() * bytes.length)) : bytes;
			codes.add(codeOf(cut));
		}
		expect(codes.has('read')).toBe(true);
		expect([...codes].filter((c) => c !== 'read' && !REFUSAL_CODES.includes(c as RefusalCode))).toEqual([]);
	});

	it('hold for changes inside the XML parts as well', () => {
		const random = generator(4711);
		const parts = workbookParts([
			{
				rows: [
					['t (h)', 'A (mol/L)'],
					[0, { v: 0.5, format: '0%' }],
					[{ f: 'A2', v: 1 }, '<2']
				]
			}
		]);
		const names = Object.keys(parts);
		const bits = [
			'<',
			'>',
			'"',
			'&',
			'0',
			'-1',
			'999999999',
			'r="',
			'</c>',
			'<c r="ZZZ9">',
			'\u0000',
			'é',
			'<row r="0">'
		];
		const codes = new Set<string>();
		for (let round = 0; round < 1500; round++) {
			const name = names[Math.floor(random() * names.length)];
			const body = String(parts[name]);
			const at = Math.floor(random() * body.length);
			const mutated =
				body.slice(0, at) +
				bits[Math.floor(random() * bits.length)] +
				body.slice(at + Math.floor(random() * 4));
			codes.add(
				codeOf(
					zipSync(
						Object.fromEntries(names.map((n) => [n, strToU8(n === name ? mutated : String(parts[n]))])),
						{ level: 0 }
					)
				)
			);
		}
		expect(codes.has('read')).toBe(true);
		expect([...codes].filter((c) => c !== 'read' && !REFUSAL_CODES.includes(c as RefusalCode))).toEqual([]);
	});
});

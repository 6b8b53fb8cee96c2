/** What the bytes are, judged by themselves and never by the file's name. */
import { notSheet, SheetRefusal } from './refusal';

const startsWith = (bytes: Uint8Array, ...head: number[]) => head.every((byte, i) => bytes[i] === byte);

const OTHERS: [number[], string][] = [
	[[0x25, 0x50, 0x44, 0x46], 'a PDF document'],
	[[0x89, 0x50, 0x4e, 0x47], 'a picture (PNG)'],
	[[0xff, 0xd8, 0xff], 'a picture (JPEG)'],
	[[0x47, 0x49, 0x46, 0x38], 'a picture (GIF)'],
	[[0x1f, 0x8b], 'a compressed archive (gzip)'],
	[[0x37, 0x7a, 0xbc, 0xaf], 'a compressed archive (7z)'],
	[[0x52, 0x61, 0x72, 0x21], 'a compressed archive (RAR)'],
	[[0x7b, 0x5c, 0x72, 0x74, 0x66], 'a text document (RTF)'],
	[[0x7f, 0x45, 0x4c, 0x46], 'a program'],
	[[0x4d, 0x5a], 'a program']
];

/** @throws SheetRefusal for anything that is neither a zip nor text */
export function detect(bytes: Uint8Array): 'zip' | 'text' {
	if (bytes.length === 0)
		throw new SheetRefusal(
			'empty',
			'The file is empty (0 bytes); a workbook or a text table is expected. Save the sheet again in your spreadsheet program and upload it.'
		);
	if (startsWith(bytes, 0x50, 0x4b, 0x03, 0x04)) return 'zip';
	if (startsWith(bytes, 0xd0, 0xcf, 0x11, 0xe0)) throw compoundFile(bytes);
	const other = OTHERS.find(([head]) => startsWith(bytes, ...head));
	if (other && !(other[1] === 'a program' && isText(bytes))) throw notSheet(other[1]);
	if (!isText(bytes)) throw notSheet('a binary file');
	return 'text';
}

/** The old container holds either an encrypted workbook or a workbook of the old format. */
function compoundFile(bytes: Uint8Array): SheetRefusal {
	const text = new TextDecoder('utf-16le').decode(bytes.subarray(0, Math.min(bytes.length, 2_000_000) & ~1));
	if (text.includes('EncryptedPackage') || text.includes('EncryptionInfo'))
		return new SheetRefusal(
			'encrypted',
			'The workbook is protected by a password, so that its cells cannot be read. Remove the password in your spreadsheet program and upload it again.'
		);
	return new SheetRefusal(
		'old-format',
		'This is a workbook of the old format (.xls); .xlsx, .csv, .tsv or .txt is expected. Save it as .xlsx and upload that.'
	);
}

/** Text has no NUL (but for UTF-16) and next to no other control characters. */
function isText(bytes: Uint8Array): boolean {
	const head = bytes.subarray(0, 65_536);
	if (utf16Of(head)) return true;
	let controls = 0;
	for (const byte of head) {
		if (byte === 0) return false;
		if (byte < 32 && byte !== 9 && byte !== 10 && byte !== 13 && byte !== 12) controls++;
	}
	return controls * 200 <= head.length;
}

/** UTF-16 by its mark, or by NULs in every other place of a text of Latin letters and digits. */
export function utf16Of(head: Uint8Array): 'utf-16le' | 'utf-16be' | null {
	if (startsWith(head, 0xff, 0xfe)) return 'utf-16le';
	if (startsWith(head, 0xfe, 0xff)) return 'utf-16be';
	if (head.length < 8) return null;
	let even = 0;
	let odd = 0;
	const n = Math.min(head.length, 4096) & ~1;
	for (let i = 0; i < n; i += 2) {
		if (head[i] === 0) even++;
		if (head[i + 1] === 0) odd++;
	}
	if (odd > n * 0.4 && even < n * 0.02) return 'utf-16le';
	if (even > n * 0.4 && odd < n * 0.02) return 'utf-16be';
	return null;
}

/** Bytes to grid, on the thread that calls it. The service calls it in a worker (`index.ts`); tests call it directly. */
import type { GridWorkbook } from '$lib/schemas/sheet';
import { detect } from './detect';
import { LIMITS, megabytes, type ReadingLimits } from './limits';
import { damaged, SheetRefusal } from './refusal';
import { readText } from './text-file';
import { readXlsx } from './workbook';

/** The name without folders, control characters or more than 120 letters: for showing, never for opening anything. */
export function plainFileName(name: string): string {
	const last = name.normalize('NFC').split(/[/\\]/).pop() ?? '';
	const shown = [...last]
		.filter((c) => c.charCodeAt(0) >= 32 && c.charCodeAt(0) !== 127 && !isDirectionMark(c))
		.join('');
	const trimmed = shown.trim().replace(/^\.+/, '');
	if (trimmed.length <= 120) return trimmed || 'sheet';
	const dot = trimmed.lastIndexOf('.');
	const ending = dot > 0 && trimmed.length - dot <= 6 ? trimmed.slice(dot) : '';
	return trimmed.slice(0, 120 - ending.length) + ending;
}

/** Marks that turn the direction of writing can make a name look like another. */
const isDirectionMark = (c: string) => /[\u200e\u200f\u202a-\u202e\u2066-\u2069]/.test(c);

/** @throws SheetRefusal and nothing else */
export function readBytes(bytes: Uint8Array, fileName: string, limits: ReadingLimits = LIMITS): GridWorkbook {
	if (bytes.length > limits.fileBytes)
		throw new SheetRefusal(
			'too-large',
			`The file has ${megabytes(bytes.length)}; at most ${megabytes(limits.fileBytes)} are read. Keep only the sheet with the assay values and upload that.`
		);
	const name = plainFileName(fileName);
	try {
		return detect(bytes) === 'zip' ? readXlsx(bytes, name, limits) : readText(bytes, name, limits);
	} catch (error) {
		if (error instanceof SheetRefusal) throw error;
		throw damaged('it cannot be read');
	}
}

/**
 * Untrusted sheets, read in a worker thread with a heap limit and a time limit, a few at a time, so that no file can harm the
 * service. The only error that comes out is `SheetRefusal`.
 */
import { Worker } from 'node:worker_threads';
import type { GridWorkbook } from '$lib/schemas/sheet';
import { LIMITS, megabytes, type ReadingLimits } from './limits';
import { SheetRefusal } from './refusal';
import { gridOfText } from './text-file';
import source from './read.worker.ts?nodeworker';
import type { ReadingAnswer, ReadingTask } from './read.worker';

export { SheetRefusal, REFUSAL_CODES, type RefusalCode } from './refusal';
export { plainFileName } from './read';
export { LIMITS, type ReadingLimits } from './limits';

/** Workers at the same time, and readings that may wait for one. */
const AT_ONCE = 2;
const WAITING = 100;
const HEAP_MB = 224;

let running = 0;
const queue: (() => void)[] = [];

/**
 * Reads a workbook or text table as received.
 * @param bytes the file; copied, so the caller's array stays whole
 * @throws SheetRefusal with a code of `REFUSAL_CODES` and a message for the person
 */
export async function readWorkbook(
	bytes: Uint8Array,
	fileName: string,
	options: Partial<ReadingLimits> = {}
): Promise<GridWorkbook> {
	return JSON.parse(await readWorkbookJson(bytes, fileName, options)) as GridWorkbook;
}

/** The same as JSON text, for storing or sending on. */
export async function readWorkbookJson(
	bytes: Uint8Array,
	fileName: string,
	options: Partial<ReadingLimits> = {}
): Promise<string> {
	const limits = { ...LIMITS, ...options };
	if (bytes.length > limits.fileBytes)
		throw new SheetRefusal(
			'too-large',
			`The file has ${megabytes(bytes.length)}; at most ${megabytes(limits.fileBytes)} are read. Keep only the sheet with the assay values and upload that.`
		);
	await turn();
	try {
		return await inWorker({ bytes, fileName, limits });
	} finally {
		running--;
		queue.shift()?.();
	}
}

/** Characters of a pasted text. */
const PASTED = 2_000_000;

/** Text pasted from the clipboard of a spreadsheet program, by the same rules as a text file. @throws SheetRefusal */
export function readPaste(text: string, options: Partial<ReadingLimits> = {}): GridWorkbook {
	const limits = { ...LIMITS, ...options };
	if (text.length > PASTED)
		throw new SheetRefusal(
			'too-large',
			`The pasted text has ${text.length.toLocaleString('en')} characters; at most ${PASTED.toLocaleString('en')} are read. Paste the rows with assay values alone, or save them as a file and upload that.`
		);
	return gridOfText(text.replace(/^\ufeff/, ''), 'Pasted table', limits, 'paste');
}

async function turn(): Promise<void> {
	if (running >= AT_ONCE) {
		if (queue.length >= WAITING)
			throw new SheetRefusal(
				'busy',
				'Many sheets are being read just now. Try again in a minute; nothing was stored.'
			);
		await new Promise<void>((go) => queue.push(go));
	}
	running++;
}

function inWorker(task: ReadingTask): Promise<string> {
	return new Promise((resolve, reject) => {
		const worker = new Worker(source, {
			eval: true,
			workerData: task,
			resourceLimits: { maxOldGenerationSizeMb: HEAP_MB, maxYoungGenerationSizeMb: 32 }
		});
		let settled = false;
		const settle = (act: () => void) => {
			if (settled) return;
			settled = true;
			clearTimeout(timer);
			void worker.terminate();
			act();
		};
		const refuse = (code: SheetRefusal['code'], message: string) =>
			settle(() => reject(new SheetRefusal(code, message)));
		const timer = setTimeout(
			() =>
				refuse(
					'timeout',
					`Reading the file took longer than ${Math.round(task.limits.timeoutMs / 1000)} s and was stopped. Keep only the sheet with the assay values and upload that.`
				),
			task.limits.timeoutMs
		);
		worker.once('message', (answer: ReadingAnswer) => {
			if (answer.ok) settle(() => resolve(answer.json));
			else refuse(answer.code, answer.message);
		});
		worker.once('error', (error: NodeJS.ErrnoException) => {
			if (error.code === 'ERR_WORKER_OUT_OF_MEMORY')
				refuse(
					'out-of-memory',
					'The file needs more memory than a sheet may. Keep only the sheet with the assay values.'
				);
			else
				refuse(
					'damaged',
					'The file cannot be read. Save it again as .xlsx in your spreadsheet program and upload that copy.'
				);
		});
		worker.once('exit', () =>
			refuse('damaged', 'Reading the file ended early. Save it again as .xlsx and upload that copy.')
		);
	});
}

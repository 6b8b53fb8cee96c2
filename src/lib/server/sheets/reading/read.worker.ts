import { parentPort, workerData } from 'node:worker_threads';
import type { ReadingLimits } from './limits';
import { readBytes } from './read';
import { SheetRefusal } from './refusal';

/** What the worker is given and what it answers. The grid travels as JSON text: quicker to hand over than as objects. */
export interface ReadingTask {
	bytes: Uint8Array;
	fileName: string;
	limits: ReadingLimits;
}
export type ReadingAnswer =
	{ ok: true; json: string } | { ok: false; code: SheetRefusal['code']; message: string };

const { bytes, fileName, limits } = workerData as ReadingTask;

function answer(): ReadingAnswer {
	try {
		return { ok: true, json: JSON.stringify(readBytes(bytes, fileName, limits)) };
	} catch (error) {
		if (error instanceof SheetRefusal) return { ok: false, code: error.code, message: error.message };
		throw error;
	}
}

parentPort?.postMessage(answer());

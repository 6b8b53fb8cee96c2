/** The steps of the demonstration, each through the use case that a page would call. */
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import type { FitOptions } from '$lib/schemas/fit';
import type { Answer, Conditions } from '$lib/schemas/sheet';
import { startFit } from '../fits/start-fit';
import { jobEnd } from '../jobs/wait';
import type { SchemeContent } from '$lib/schemas/scheme';
import type { Actor } from '../policy';
import { confirmRun, type ConfirmedRun } from '../sheets/confirm-run';
import { receiveSheet } from '../sheets/receive-sheet';
import { readStudy } from '../studies/read-study';
import { saveScheme } from '../studies/save-scheme';

/** Who plays in the demonstration. */
export interface Cast {
	chemist: Actor;
	lead: Actor;
	groupId: string;
	/** Group that the finished recipe is shared with. */
	holderId: string;
}

export const perHour = (value: number) => ({ value, unit: '1/h' });

export function conditionsOf(celsius: number, molPerL: Record<string, number>): Conditions {
	const charges = Object.entries(molPerL).map(([species, value]) => [species, { value, unit: 'mol/L' }]);
	return {
		temperature: { value: celsius, unit: 'degC' },
		initial: Object.fromEntries(charges) as Conditions['initial'],
		excess: {},
		timeZero: 'end of addition'
	};
}

/** Puts this content into the study's first scheme. */
export async function drawScheme(actor: Actor, studyId: string, content: SchemeContent): Promise<string> {
	const [first] = (await readStudy(actor, studyId)).schemes;
	await saveScheme(actor, { schemeId: first.id, version: first.version, content });
	return first.id;
}

export interface SheetToRun {
	file: string;
	name: string;
	conditions: Conditions;
	/** Answers to what the reader asks, by the rule that asks. */
	answers?: Record<string, Answer>;
}

const exampleFile = (file: string): Uint8Array => readFileSync(join(process.cwd(), 'examples', file));

export async function uploadExample(actor: Actor, studyId: string, file: string) {
	return receiveSheet(actor, { studyId, fileName: file, bytes: exampleFile(file) });
}

/** Uploads an example sheet and confirms its first table as a run, with the answers a chemist would give. */
export async function sheetToRun(actor: Actor, studyId: string, sheet: SheetToRun): Promise<ConfirmedRun> {
	const received = await uploadExample(actor, studyId, sheet.file);
	const [table] = received.proposal.tables;
	const answers = Object.fromEntries(
		table.findings.flatMap((finding) => {
			const answer = sheet.answers?.[finding.rule];
			return answer ? [[finding.id, answer]] : [];
		})
	);
	return confirmRun(actor, {
		sheetId: received.id,
		tableKey: table.id,
		conditions: sheet.conditions,
		answers,
		name: sheet.name
	});
}

/** One after the other, so that the runs are numbered in this order. */
export async function runsOf(actor: Actor, studyId: string, sheets: SheetToRun[]): Promise<ConfirmedRun[]> {
	const runs: ConfirmedRun[] = [];
	for (const sheet of sheets) runs.push(await sheetToRun(actor, studyId, sheet));
	return runs;
}

export async function fitRuns(
	actor: Actor,
	input: { studyId: string; schemeId: string; runIds: string[]; options?: Partial<FitOptions> }
): Promise<string> {
	const { id } = await startFit(actor, input);
	const status = await jobEnd(id);
	if (status !== 'done') throw new Error(`The demonstration's fit ended as ${status}.`);
	return id;
}

import type { GridWorkbook } from '$lib/schemas/sheet';
import { callEngine } from '../jobs/engine-calls';
import { examineHere, type Examined, type ExamineTask } from './examine-here';
import source from './examine.worker.ts?nodeworker';

export { workOn, type Examined, type ExamineTask, type Surroundings } from './examine-here';

const SMALL = 3000;
const cellsOf = (workbook: GridWorkbook): number =>
	workbook.sheets.reduce((sum, sheet) => sum + sheet.rows.reduce((n, row) => n + row.c.length, 0), 0);

/** Small enough to be looked through within a request, without anybody noticing. */
export const isSmall = (workbook: GridWorkbook): boolean => cellsOf(workbook) <= SMALL;

/** Small sheets at once, large ones in a thread, so that nobody else has to wait for them. */
export async function examine(task: ExamineTask): Promise<Examined> {
	if (isSmall(task.workbook)) return examineHere(task);
	return callEngine<Examined>({ source, task });
}

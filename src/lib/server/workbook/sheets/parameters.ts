import { at, letters, literal, on, span, type SheetWriter } from '../sheet-writer';
import { SHEETS, type Layout } from '../layout';
import type { RecalculationPlan } from '../plan';

const FIRST = 5;
const COLUMNS = { value: 2, factor: 8, si: 9, signed: 10, check: 11 };

/** Every parameter as a cell. Changing one moves the curves and turns the cover to "differs from signed values". */
export function writeParameters(sheet: SheetWriter, plan: RecalculationPlan, layout: Layout): void {
	sheet.heading(1, 'Parameters');
	sheet.note(
		2,
		'The estimates in column B feed every other sheet. The estimate as stored stands in column J.'
	);
	sheet.header(FIRST - 1, [
		'Parameter',
		'Estimate',
		'Unit',
		'State',
		'Standard error',
		'95 % interval, lower',
		'95 % interval, upper',
		'Factor to the engine’s unit',
		'In the engine’s unit',
		'As stored',
		'Agrees'
	]);
	const rows = new Map(plan.parameters.map((p, i) => [p.id, FIRST + i]));
	plan.parameters.forEach((p, i) => {
		const row = FIRST + i;
		sheet.row(row, [p.id, p.value, p.unit, p.state, p.standardError, p.ci95?.[0], p.ci95?.[1], p.factor]);
		const leader = p.tie ? rows.get(p.tie.to) : undefined;
		const own = `${letters(COLUMNS.value)}${row}*${letters(COLUMNS.factor)}${row}`;
		sheet.formula(
			row,
			COLUMNS.si,
			leader && p.tie ? `${letters(COLUMNS.si)}${leader}*${literal(p.tie.factor)}` : own,
			p.si
		);
		sheet.number(row, COLUMNS.signed, p.value);
		sheet.formula(row, COLUMNS.check, `ABS(B${row}-J${row})<=${literal(1e-12)}*ABS(J${row})`, true);
		layout.si.set(p.id, on(SHEETS.parameters, at(row, COLUMNS.si)));
	});
	const last = FIRST + Math.max(1, plan.parameters.length) - 1;
	sheet.text(3, 1, 'All agree');
	sheet.formula(3, 2, `AND(${span(FIRST, COLUMNS.check, last, COLUMNS.check)})`, true);
	layout.checks.push({ sheet: SHEETS.parameters, cell: at(3, 2), agrees: true });
	let row = last + 2;
	row = writeCorrelation(sheet, plan, row);
	sheet.text(row + 1, 1, 'Gas constant');
	sheet.number(row + 1, 2, plan.gasConstant);
	sheet.text(row + 1, 3, 'J/(mol K)');
	layout.si.set('gas constant', on(SHEETS.parameters, at(row + 1, 2)));
	sheet.text(row + 2, 1, 'Reference temperature');
	sheet.number(row + 2, 2, plan.referenceK);
	sheet.text(row + 2, 3, 'K');
	layout.si.set('reference temperature', on(SHEETS.parameters, at(row + 2, 2)));
	sheet.finish(FIRST - 1);
}

function writeCorrelation(sheet: SheetWriter, { report }: RecalculationPlan, row: number): number {
	if (report.fittedIds.length === 0) return row;
	sheet.heading(row, 'Correlation of the fitted parameters');
	sheet.header(row + 1, ['', ...report.fittedIds]);
	report.fittedIds.forEach((id, i) => sheet.row(row + 2 + i, [id, ...(report.correlation[i] ?? [])]));
	return row + 3 + report.fittedIds.length;
}

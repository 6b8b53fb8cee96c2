import { DEGREE, norm1, NORM_LIMIT, type Matrix } from '../ladder';
import { at, literal, on, span, type SheetWriter } from '../sheet-writer';
import { SHEETS, type Layout } from '../layout';
import type { PlanRun, RecalculationPlan } from '../plan';
import { matrixCell, matrixRow } from './scheme';

/**
 * The concentrations from the rate constants alone: Taylor polynomial, squarings, and a climb along the binary digits
 * of each time. No eigenvalue of the engine takes part.
 */
export function writeVerify(sheet: SheetWriter, plan: RecalculationPlan, layout: Layout): void {
	sheet.heading(1, 'Verify: matrix exponential from the rate constants alone');
	sheet.note(
		2,
		'E0 = exp(K h) by a Taylor polynomial of degree 8 with |K| h at most 0.02, then squared again and again; each time is climbed along its binary digits.'
	);
	const checks: string[] = [];
	let row = 5;
	plan.runs.forEach((run, r) => {
		row = writeRun(sheet, plan, run, r, row, layout, checks) + 1;
	});
	sheet.text(3, 1, 'Step lengths small enough');
	sheet.formula(3, 2, checks.length ? `AND(${checks.join(',')})` : 'TRUE()', true);
	layout.checks.push({ sheet: SHEETS.verify, cell: at(3, 2), agrees: true });
	sheet.finish();
}

function writeRun(
	sheet: SheetWriter,
	plan: RecalculationPlan,
	run: PlanRun,
	r: number,
	top: number,
	layout: Layout,
	checks: string[]
): number {
	const n = plan.species.length;
	const { ladder } = run;
	sheet.heading(top, `${run.label}, time in ${run.timeUnit}`);
	if (run.logged) {
		sheet.note(
			top + 1,
			'This run follows a logged temperature: its predictions stand as stored, not recalculated.'
		);
		return top + 2;
	}
	sheet.row(top + 1, ['h', ladder.stepLength, 'squarings', ladder.squarings, '|K| h']);
	const h = at(top + 1, 2);
	sheet.text(top + 2, 1, 'Column sums of |K|');
	plan.species.forEach((_, j) => {
		const column = plan.species.map((_, i) => `ABS(${matrixCell(layout, r, i, j)})`).join('+');
		const sum = ladder.matrix.reduce((total, line) => total + Math.abs(line[j]), 0);
		sheet.formula(top + 2, 2 + j, column, sum);
	});
	const reach = norm1(ladder.matrix) * ladder.stepLength;
	sheet.formula(top + 1, 6, `MAX(${span(top + 2, 2, top + 2, 1 + n)})*${h}`, reach);
	// A constant may be changed a little before the step length has to shrink: half as much again still leaves 1e-19.
	sheet.formula(top + 1, 7, `${at(top + 1, 6)}<=${literal(NORM_LIMIT * 1.5)}`, true);
	checks.push(at(top + 1, 7));
	sheet.header(top + 3, ['Charge, mol/L', ...plan.species]);
	writeCharge(sheet, run, r, top + 4, layout);
	let row = top + 6;
	const blockAt = new Map<string, number>();
	const block = (name: string, matrix: Matrix, formula: (i: number, j: number) => string) => {
		sheet.text(row, 1, name);
		matrix.forEach((line, i) =>
			line.forEach((value, j) => sheet.formula(row + i, 2 + j, formula(i, j), value))
		);
		blockAt.set(name, row);
		row += n + 1;
	};
	const rowOf = (name: string, i: number) => span(blockAt.get(name)! + i, 2, blockAt.get(name)! + i, 1 + n);
	const columnOf = (name: string, j: number) =>
		span(blockAt.get(name)!, 2 + j, blockAt.get(name)! + n - 1, 2 + j);
	const unit = (i: number, j: number) => (i === j ? '1+' : '');
	block('K h', ladder.scaled, (i, j) => `${matrixCell(layout, r, i, j)}*${h}`);
	const x = blockAt.get('K h')!;
	block(`T${DEGREE}`, ladder.taylor[0], (i, j) => `${unit(i, j)}${at(x + i, 2 + j)}/${DEGREE}`);
	for (let m = DEGREE - 1; m >= 1; m--)
		block(
			`T${m}`,
			ladder.taylor[DEGREE - m],
			(i, j) => `${unit(i, j)}SUM(MMULT(${rowOf('K h', i)},${columnOf(`T${m + 1}`, j)}))/${m}`
		);
	block('E0', ladder.powers[0], (i, j) => at(blockAt.get('T1')! + i, 2 + j));
	for (let p = 1; p <= ladder.squarings; p++)
		block(
			`E${p}`,
			ladder.powers[p],
			(i, j) => `SUM(MMULT(${rowOf(`E${p - 1}`, i)},${columnOf(`E${p - 1}`, j)}))`
		);
	return writeTimes(sheet, plan, run, r, row, h, rowOf, layout);
}

function writeCharge(sheet: SheetWriter, run: PlanRun, r: number, row: number, layout: Layout): void {
	run.charge.forEach((c, i) => {
		const source = c.parameterId ? layout.si.get(c.parameterId) : undefined;
		if (source) sheet.formula(row, 2 + i, source, c.value);
		else sheet.number(row, 2 + i, c.value);
		layout.runs[r].charge.push(on(SHEETS.verify, at(row, 2 + i)));
	});
}

/** Columns: recorded time, shifted time, m, r, result per species, Taylor terms, then one vector a power. */
function writeTimes(
	sheet: SheetWriter,
	plan: RecalculationPlan,
	run: PlanRun,
	r: number,
	top: number,
	h: string,
	rowOf: (name: string, i: number) => string,
	layout: Layout
): number {
	const n = plan.species.length;
	const result = 5;
	const terms = result + n;
	const climbs = terms + (DEGREE + 1) * n;
	const last = climbs + run.ladder.powers.length * n;
	sheet.header(top, ['Time', 'From time zero', 'm', 'r', ...plan.species.map((s) => `${s}, mol/L`)]);
	const offset = run.offset.parameterId ? layout.si.get(run.offset.parameterId) : undefined;
	run.times.forEach((time, k) => {
		const row = top + 1 + k;
		const c = run.climbs[k];
		sheet.number(row, 1, time);
		const shifted = Math.max(0, time + run.offset.value);
		sheet.formula(
			row,
			2,
			offset ? `MAX(0,A${row}+${offset}/${run.secondsPerUnit})` : `MAX(0,A${row})`,
			shifted
		);
		sheet.formula(row, 3, `INT(B${row}/${h})`, c.whole);
		sheet.formula(row, 4, `B${row}-C${row}*${h}`, c.rest);
		const vector = (column: number) => span(row, column, row, column + n - 1);
		for (let i = 0; i < n; i++) {
			sheet.formula(row, terms + i, layout.runs[r].charge[i], c.terms[0][i]);
			for (let p = 1; p <= DEGREE; p++)
				sheet.formula(
					row,
					terms + p * n + i,
					`SUMPRODUCT(${matrixRow(layout, r, i, n)},${vector(terms + (p - 1) * n)})*$D${row}/${p}`,
					c.terms[p][i]
				);
			const sum = Array.from({ length: DEGREE + 1 }, (_, p) => at(row, terms + p * n + i)).join('+');
			sheet.formula(row, climbs + i, sum, c.steps[0][i]);
			run.ladder.powers.forEach((_, j) => {
				const before = climbs + j * n;
				sheet.formula(
					row,
					before + n + i,
					`IF(MOD(INT($C${row}/${literal(2 ** j)}),2)=1,SUMPRODUCT(${rowOf(`E${j}`, i)},${vector(before)}),${at(row, before + i)})`,
					c.steps[j + 1][i]
				);
			});
			sheet.formula(row, result + i, at(row, last + i), c.steps[c.steps.length - 1][i]);
		}
		layout.runs[r].time.push(on(SHEETS.verify, at(row, 2)));
		layout.runs[r].concentration.push(plan.species.map((_, i) => on(SHEETS.verify, at(row, result + i))));
	});
	return top + 1 + run.times.length;
}

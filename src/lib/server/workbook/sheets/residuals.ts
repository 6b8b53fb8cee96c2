import { at, literal, span, type SheetWriter } from '../sheet-writer';
import { SHEETS, TOLERANCE, type Layout } from '../layout';
import type { PlanPoint, RecalculationPlan } from '../plan';

const FIRST = 12;

/** Predicted − observed and the sum of squares, live from the rate constants, held against what the fit stored. */
export function writeResiduals(sheet: SheetWriter, plan: RecalculationPlan, layout: Layout): void {
	const { points, report } = plan;
	sheet.heading(1, 'Residuals');
	sheet.note(
		2,
		'Residual = observed − predicted. A value given as a limit counts only when the prediction lies beyond it.'
	);
	const last = FIRST + Math.max(1, points.length) - 1;
	sheet.header(FIRST - 1, [
		'Run',
		'Channel',
		'Time',
		'Time unit',
		'Kind',
		'Observed',
		'Sigma',
		'Predicted, live',
		'Predicted, stored',
		'Residual, live',
		'Weighted square',
		'Agrees'
	]);
	points.forEach((point, i) => writePoint(sheet, plan, layout, point, FIRST + i));
	sheet.row(4, ['', 'Live', 'Stored', 'Agrees']);
	const ssr = points.reduce((sum, p) => sum + weightedSquare(p), 0);
	sheet.text(5, 1, 'Weighted sum of squares');
	sheet.formula(5, 2, points.length ? `SUM(${span(FIRST, 11, last, 11)})` : '0', ssr);
	sheet.number(5, 3, report.weightedSsr);
	sheet.formula(5, 4, `ABS(B5-C5)<=${literal(TOLERANCE)}*ABS(C5)+${literal(1e-24)}`, true);
	sheet.row(6, ['Values counted', report.pointsUsed, '', 'Degrees of freedom', report.degreesOfFreedom]);
	sheet.text(7, 1, 'Residual standard error s');
	const hasS = report.residualStandardError !== null && report.degreesOfFreedom > 0;
	if (hasS) {
		sheet.formula(7, 2, 'SQRT(B5/E6)', Math.sqrt(ssr / report.degreesOfFreedom));
		sheet.number(7, 3, report.residualStandardError!);
		sheet.formula(7, 4, `ABS(B7-C7)<=${literal(TOLERANCE)}*ABS(C7)+${literal(1e-24)}`, true);
	} else sheet.text(7, 2, 'no degrees of freedom');
	sheet.row(8, ['Values given as a limit', report.pointsCensored]);
	sheet.text(9, 1, 'All agree');
	const all = [
		'D5',
		...(hasS ? ['D7'] : []),
		...(points.length ? [`AND(${span(FIRST, 12, last, 12)})`] : [])
	].join(',');
	sheet.formula(9, 2, `AND(${all})`, true);
	layout.checks.push({ sheet: SHEETS.residuals, cell: at(9, 2), agrees: true });
	sheet.finish(FIRST - 1);
}

function beyond(point: PlanPoint): boolean {
	if (point.kind === 'value') return true;
	return point.kind === 'below' ? point.predicted > point.observed : point.predicted < point.observed;
}
const weightedSquare = (p: PlanPoint): number =>
	beyond(p) ? ((p.observed - p.predicted) / p.sigma) ** 2 : 0;

function writePoint(
	sheet: SheetWriter,
	plan: RecalculationPlan,
	layout: Layout,
	point: PlanPoint,
	row: number
): void {
	const run = plan.runs[point.run];
	const channel = plan.channels[point.run][point.channel];
	sheet.row(row, [
		run.label,
		channel.id,
		point.recordedTime,
		run.timeUnit,
		point.kind,
		point.observed,
		point.sigma
	]);
	if (run.logged) sheet.number(row, 8, point.predicted);
	else sheet.formula(row, 8, prediction(plan, layout, point), point.predicted);
	sheet.number(row, 9, point.predicted);
	const gap = `F${row}-H${row}`;
	const formula = {
		value: gap,
		below: `IF(H${row}>F${row},${gap},0)`,
		above: `IF(H${row}<F${row},${gap},0)`
	}[point.kind];
	sheet.formula(row, 10, formula, beyond(point) ? point.observed - point.predicted : 0);
	sheet.formula(row, 11, `(J${row}/G${row})^2`, weightedSquare(point));
	sheet.formula(
		row,
		12,
		`ABS(H${row}-I${row})<=${literal(TOLERANCE)}*MAX(ABS(F${row}),ABS(I${row}),${literal(1e-12)})`,
		true
	);
}

/** f·Σ w c in the channel's unit; for area % its share of all that the detector sees. */
function prediction(plan: RecalculationPlan, layout: Layout, point: PlanPoint): string {
	const channels = plan.channels[point.run];
	const own = signal(plan, layout, point, point.channel);
	if (!channels[point.channel].areaPercent) return own;
	const area = channels.map((c, i) => (c.areaPercent ? i : -1)).filter((i) => i >= 0);
	const seen = new Set(area.flatMap((i) => Array.from(channels[i].species)));
	const unassayed = plan.species.flatMap((_, i) =>
		seen.has(i) ? [] : [layout.runs[point.run].concentration[point.time][i]]
	);
	const total = [...area.map((i) => signal(plan, layout, point, i)), ...unassayed].join('+');
	return `100*(${own})/(${total})`;
}

function signal(plan: RecalculationPlan, layout: Layout, point: PlanPoint, index: number): string {
	const channel = plan.channels[point.run][index];
	const cells = layout.runs[point.run].concentration[point.time];
	const sum = Array.from(channel.species, (s, i) => {
		const weight = channel.weights[i];
		return weight === 1 ? cells[s] : `${literal(weight)}*${cells[s]}`;
	}).join('+');
	const response = layout.si.get(`${channel.id}.responseFactor`);
	return response ? `${response}*(${sum})` : sum;
}

import XlsxPopulate, { type Workbook } from 'xlsx-populate';
import { AppError } from '../errors';
import type { WorkbookInput } from './input';
import { emptyLayout, SHEETS, type Layout } from './layout';
import { planRecalculation, type RecalculationPlan } from './plan';
import { SheetWriter } from './sheet-writer';
import { writeCover } from './sheets/cover';
import { writeCurves } from './sheets/curves';
import { writeReceived, writeUsed } from './sheets/data';
import { writeParameters } from './sheets/parameters';
import { writeDecisions, writeRecipe } from './sheets/recipe';
import {
	writeAssumptions,
	writeAudit,
	writeCautions,
	writeFits,
	writeSignatures,
	writeVersions
} from './sheets/records';
import { writeResiduals } from './sheets/residuals';
import { writeScheme } from './sheets/scheme';
import { writeVerify } from './sheets/verify';

/** Past this a spreadsheet program takes minutes to open and recalculate the file. */
const FORMULA_LIMIT = 400_000;

/** Formula cells that the sheets "Verify" and "Curves" will need. */
export function formulaCount(plan: RecalculationPlan): number {
	const n = plan.species.length;
	return plan.runs.reduce((sum, run) => {
		const ladder = n * n * (9 + run.ladder.powers.length);
		const perTime = n * (11 + run.ladder.powers.length) + n * 3 + run.modes.length * 2;
		return sum + ladder + run.times.length * perTime;
	}, plan.points.length * 4);
}

function checkSize(plan: RecalculationPlan): void {
	const count = formulaCount(plan);
	if (count <= FORMULA_LIMIT) return;
	throw new AppError(
		'too-large',
		`The workbook would need about ${Math.round(count / 1000)} 000 formulas; at most ${FORMULA_LIMIT / 1000} 000 open in reasonable time. Fit fewer timepoints, or ask for the data through the API.`
	);
}

/** Dependence first, so that each sheet finds the cells it names. */
export function writeNumbers(
	open: (name: string) => SheetWriter,
	plan: RecalculationPlan,
	layout: Layout
): void {
	writeParameters(open(SHEETS.parameters), plan, layout);
	writeScheme(open(SHEETS.scheme), plan, layout);
	writeVerify(open(SHEETS.verify), plan, layout);
	writeCurves(open(SHEETS.curves), plan, layout);
	writeResiduals(open(SHEETS.residuals), plan, layout);
}

function writeText(open: (name: string) => SheetWriter, input: WorkbookInput, layout: Layout): void {
	writeSignatures(open(SHEETS.signatures), input);
	writeReceived(open(SHEETS.received), input.received, open);
	writeUsed(open(SHEETS.used), input.used);
	writeDecisions(open(SHEETS.decisions), input, layout);
	writeCautions(open(SHEETS.cautions), input);
	writeRecipe(open(SHEETS.recipe), input);
	writeVersions(open(SHEETS.versions), input);
	writeFits(open(SHEETS.fits), input);
	writeAudit(open(SHEETS.audit), input);
	writeAssumptions(open(SHEETS.assumptions), input);
}

/** Every page of a print carries record and version; a sheet is as wide as a page, but for the one that would be too small to read. */
function printSetup(workbook: Workbook, input: WorkbookInput): void {
	const footer = `&L${escapeFooter(`${input.recipe.id} v${input.shown.number}`)}&CUncontrolled when printed&R&P/&N`;
	for (const sheet of workbook.sheets()) {
		const internals = sheet as unknown as {
			_sheetPrNode?: { children: unknown[] };
			_node?: { children: { name: string; attributes?: object; children?: unknown[] }[] };
		};
		const attributes: Record<string, unknown> = { paperSize: 9, orientation: 'landscape' };
		if (sheet.name() !== SHEETS.verify) {
			Object.assign(attributes, { fitToWidth: 1, fitToHeight: 0 });
			internals._sheetPrNode?.children.push({
				name: 'pageSetUpPr',
				attributes: { fitToPage: 1 },
				children: []
			});
		}
		internals._node?.children.push({ name: 'pageSetup', attributes, children: [] });
		internals._node?.children.push({
			name: 'headerFooter',
			attributes: {},
			children: [{ name: 'oddFooter', attributes: {}, children: [footer] }]
		});
	}
}
/**
 * The style part as the standard has it: a fill names its pattern, colours carry their opacity, and a list without entries is
 * left out. Programs that read strictly refuse the whole file otherwise.
 */
function tidyStyles(workbook: Workbook): void {
	const { _node } = (workbook as unknown as { _styleSheet: { _node: StyleNode } })._styleSheet;
	_node.children = _node.children.filter((c) => c.name !== 'numFmts' || c.children.length > 0);
	const visit = (node: StyleNode): void => {
		if (node.name === 'fill' && node.children.length === 0)
			node.children.push({ name: 'patternFill', attributes: { patternType: 'none' }, children: [] });
		const { rgb } = node.attributes ?? {};
		if (typeof rgb === 'string' && rgb.length === 6) node.attributes!.rgb = `FF${rgb}`;
		for (const child of node.children ?? []) if (typeof child === 'object') visit(child);
	};
	visit(_node);
}

interface StyleNode {
	name: string;
	attributes?: Record<string, unknown>;
	children: StyleNode[];
}

const escapeFooter = (text: string): string => text.replaceAll('&', '&&');

/**
 * The QA workbook: no macros, links, volatile functions or dynamic arrays; every number recalculates from the cells on
 * "Parameters", with its value stored beside the formula.
 */
export async function buildWorkbook(input: WorkbookInput): Promise<Buffer> {
	const plan = planRecalculation(input.fit.request, input.fit.report, input.labels);
	checkSize(plan);
	const workbook = await XlsxPopulate.fromBlankAsync();
	const first = workbook.sheet(0).name(SHEETS.cover);
	for (const name of Object.values(SHEETS)) if (name !== SHEETS.cover) workbook.addSheet(name);
	const open = (name: string) => new SheetWriter(workbook.sheet(name) ?? workbook.addSheet(name), name);
	const layout = emptyLayout();
	writeNumbers(open, plan, layout);
	writeText(open, input, layout);
	writeCover(
		new SheetWriter(first, SHEETS.cover),
		input,
		layout,
		workbook.sheets().map((s) => s.name())
	);
	printSetup(workbook, input);
	tidyStyles(workbook);
	return workbook.outputAsync();
}

import { STATE_NAMES, WHAT_VALIDATED_SAYS } from '$lib/recipe/states';
import { on } from '../sheet-writer';
import type { SheetWriter } from '../sheet-writer';
import type { WorkbookInput } from '../input';
import type { Layout } from '../layout';

/** What a person sees first: what this is, whether it still agrees, and the checksums to hold it against. */
export function writeCover(sheet: SheetWriter, input: WorkbookInput, layout: Layout, sheets: string[]): void {
	const { shown, exported, site } = input;
	sheet.heading(1, `Master recipe ${shown.content.title}, version ${shown.number}`);
	sheet.note(
		2,
		'Recalculates without the service: every number follows from the cells on "Parameters". Uncontrolled when printed.'
	);
	const rows: [string, string | number][] = [
		['State', STATE_NAMES[shown.state]],
		['What "Validated" says', WHAT_VALIDATED_SAYS],
		['Record', input.recipe.id],
		['Version hash (SHA-256)', shown.contentHash],
		['Study', input.study.name],
		['Group', input.group.name],
		['Group works under GxP', input.group.gxp ? 'yes' : 'no'],
		['Fit', `fit ${input.fit.number}, input hash ${input.fit.inputHash}`],
		['Engine version', shown.content.basis.engineVersion],
		['Software version', site.softwareVersion],
		['Site', site.name],
		['Site time zone', site.timeZone],
		['Exported by', exported.by],
		['Exported at (UTC)', exported.at.toISOString()],
		['Exported at (site)', localTime(exported.at, site.timeZone)]
	];
	sheet.heading(4, 'All checks');
	const cells = layout.checks.map((c) => on(c.sheet, c.cell));
	const agrees = layout.checks.every((c) => c.agrees);
	const differs = 'differs from signed values';
	sheet.formula(4, 2, `IF(AND(${cells.join(',')}),TRUE(),"${differs}")`, agrees ? true : differs);
	layout.checks.forEach((c, i) => {
		sheet.text(5 + i, 1, c.sheet);
		sheet.formula(5 + i, 2, on(c.sheet, c.cell), c.agrees);
	});
	let row = 6 + layout.checks.length;
	for (const [label, value] of rows) sheet.row(row++, [label, value]);
	if (shown.supersededData.length > 0)
		sheet.row(row++, [
			'Based on superseded data',
			shown.supersededData
				.map((d) => `run ${d.runNumber}: revision ${d.used} used, ${d.current} is the newest`)
				.join('; ')
		]);
	row = sheet.table(
		row + 1,
		['Source file', 'SHA-256'],
		input.received.map((f) => [f.fileName, f.sha256])
	);
	sheet.table(
		row + 1,
		['Sheets'],
		sheets.map((s) => [s])
	);
	sheet.finish();
}

export function localTime(date: Date, timeZone: string): string {
	return new Intl.DateTimeFormat('en-GB', {
		timeZone,
		day: '2-digit',
		month: 'short',
		year: 'numeric',
		hour: '2-digit',
		minute: '2-digit',
		second: '2-digit',
		timeZoneName: 'short'
	}).format(date);
}

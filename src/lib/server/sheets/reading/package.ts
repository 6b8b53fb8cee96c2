/** The parts of an .xlsx package (ECMA-376-2): what kind of file it is, and where its parts lie. */
import type { ReadingLimits } from './limits';
import { damaged, notSheet, SheetRefusal } from './refusal';
import { XmlReader, type XmlEvents } from './xml';
import { readDirectory, unfold, UnfoldBudget, type ZipMember } from './zip';

export interface Relation {
	id: string;
	type: string;
	target: string;
}

export class Package {
	private readonly members: Map<string, ZipMember>;
	private readonly budget: UnfoldBudget;

	constructor(
		private readonly bytes: Uint8Array,
		private readonly limits: ReadingLimits
	) {
		this.members = readDirectory(bytes, limits);
		this.budget = new UnfoldBudget(limits);
		refuseOtherKinds([...this.members.keys()]);
	}

	has(name: string): boolean {
		return this.members.has(name);
	}

	/** Streams a part through the events. @throws SheetRefusal */
	read(name: string, events: XmlEvents): void {
		const member = this.members.get(name);
		if (!member) throw damaged(`the part "${name}" is missing`);
		const reader = new XmlReader(name, events, this.limits.elements);
		unfold(this.bytes, member, this.budget, (piece) => reader.write(piece));
		reader.finish();
	}

	/** Relations of a part (or of the package for ""), targets resolved to part names; external ones are left out. */
	relations(part: string): Relation[] {
		const slash = part.lastIndexOf('/');
		const folder = slash < 0 ? '' : part.slice(0, slash + 1);
		const name = `${folder}_rels/${part.slice(slash + 1)}.rels`;
		const found: Relation[] = [];
		if (!this.has(name)) return found;
		this.read(name, {
			open: (element, a) => {
				if (element !== 'Relationship' || a.TargetMode === 'External') return;
				if (found.length > 5_000) throw damaged('it has too many relations');
				found.push({
					id: a.Id ?? '',
					type: (a.Type ?? '').split('/').pop() ?? '',
					target: resolve(folder, a.Target ?? '')
				});
			}
		});
		return found;
	}
}

function resolve(folder: string, target: string): string {
	const steps = target.startsWith('/') ? [] : folder.split('/').filter(Boolean);
	for (const step of target.split('/')) {
		if (step === '..') steps.pop();
		else if (step !== '' && step !== '.') steps.push(step);
	}
	return steps.join('/');
}

function refuseOtherKinds(names: string[]): void {
	const has = (test: RegExp) => names.some((name) => test.test(name));
	if (has(/(^|\/)vbaProject\.bin$/i) || has(/^xl\/macrosheets\//i))
		throw new SheetRefusal(
			'macro-enabled',
			'The workbook contains macros; a workbook without them is expected, and macros are never run here. Save it as .xlsx and upload that.'
		);
	if (has(/^xl\/externalLinks\//i))
		throw new SheetRefusal(
			'external-links',
			'The workbook takes values from other files; numbers that stand in the file itself are expected, so that they can be traced. Break the links (paste as values) in your spreadsheet program and upload it again.'
		);
	if (has(/^xl\/workbook\.bin$/i))
		throw new SheetRefusal(
			'other-format',
			'This is a binary workbook (.xlsb); .xlsx, .csv, .tsv or .txt is expected. Save it as .xlsx and upload that.'
		);
	if (has(/^xl\/workbook\.xml$/i) || names.includes('[Content_Types].xml')) {
		if (has(/^(word|ppt|visio)\//i)) throw notSheet('a text document or a presentation');
		return;
	}
	if (names.includes('mimetype') || names.includes('content.xml'))
		throw new SheetRefusal(
			'other-format',
			'This is an OpenDocument file; .xlsx, .csv, .tsv or .txt is expected. Save it as .xlsx or .csv and upload that.'
		);
	throw notSheet('a zip archive without a workbook');
}

/** Refuses macro-enabled content types and finds the workbook part. */
export function workbookPart(pack: Package): string {
	pack.read('[Content_Types].xml', {
		open: (_name, a) => {
			const type = a.ContentType ?? '';
			if (/macroEnabled/i.test(type))
				throw new SheetRefusal(
					'macro-enabled',
					'The workbook is macro-enabled (.xlsm); a workbook without macros is expected, and macros are never run here. Save it as .xlsx and upload that.'
				);
		}
	});
	const main = pack.relations('').find((r) => r.type === 'officeDocument')?.target;
	if (main && pack.has(main)) return main;
	if (pack.has('xl/workbook.xml')) return 'xl/workbook.xml';
	throw notSheet('a package without a workbook');
}

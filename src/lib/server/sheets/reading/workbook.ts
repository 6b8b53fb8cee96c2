/** An .xlsx package as a grid. Pure reading: nothing is evaluated, followed or fetched. */
import type { GridSheet, GridWorkbook } from '$lib/schemas/sheet';
import { CELL_TEXT, type ReadingLimits } from './limits';
import { Package, workbookPart } from './package';
import { RaisedRuns } from './raised';
import { damaged, SheetRefusal } from './refusal';
import { CellBudget } from './cell-budget';
import { readSheet, type SheetSource } from './sheet-xml';
import { readStyles } from './styles';
import { ownText } from './own-text';

interface Listed {
	name: string;
	state: GridSheet['state'];
	relation: string;
}

/** @throws SheetRefusal */
export function readXlsx(bytes: Uint8Array, fileName: string, limits: ReadingLimits): GridWorkbook {
	const pack = new Package(bytes, limits);
	const main = workbookPart(pack);
	const { sheets: listed, date1904 } = readList(pack, main, limits);
	const relations = pack.relations(main);
	const part = (type: string) => relations.find((r) => r.type === type)?.target;
	const strings = readStrings(pack, part('sharedStrings'), limits);
	const styles = readStyles(pack, part('styles'));
	const budget = new CellBudget(limits);
	const sheets: GridSheet[] = [];
	const otherSheets: string[] = [];
	for (const { name, state, relation } of listed) {
		const target = relations.find((r) => r.id === relation);
		if (target?.type !== 'worksheet') otherSheets.push(name);
		else {
			const source: SheetSource = { name, state, part: target.target, date1904 };
			sheets.push(readSheet(pack, source, { strings, styles, budget, limits }));
		}
	}
	const dateSystem = date1904 ? 1904 : 1900;
	return {
		fileName,
		kind: 'xlsx',
		dateSystem,
		styles: styles.styles,
		sheets,
		...(otherSheets.length ? { otherSheets } : {})
	};
}

function readList(
	pack: Package,
	main: string,
	limits: ReadingLimits
): { sheets: Listed[]; date1904: boolean } {
	const sheets: Listed[] = [];
	let date1904 = false;
	pack.read(main, {
		open: (name, a) => {
			if (name === 'workbookPr') date1904 = a.date1904 === '1' || a.date1904 === 'true';
			if (name !== 'sheet') return;
			if (sheets.length >= limits.sheets)
				throw new SheetRefusal(
					'too-large',
					`The workbook has more than ${limits.sheets} sheets, which are the most that are read. Keep only those with assay values and upload that.`
				);
			const state = a.state === 'veryHidden' ? 'very hidden' : a.state === 'hidden' ? 'hidden' : 'visible';
			const relation = a['r:id'] ?? Object.entries(a).find(([key]) => key.endsWith(':id'))?.[1] ?? '';
			sheets.push({ name: (a.name ?? `Sheet ${sheets.length + 1}`).slice(0, 60), state, relation });
		}
	});
	if (sheets.length === 0) throw damaged('it lists no sheet');
	return { sheets, date1904 };
}

/** Shared texts: plain or rich (runs joined), without phonetic hints. */
function readStrings(pack: Package, part: string | undefined, limits: ReadingLimits): string[] {
	const strings: string[] = [];
	if (!part || !pack.has(part)) return strings;
	let text = '';
	let collecting = false;
	let phonetic = 0;
	const runs = new RaisedRuns();
	let characters = 0;
	pack.read(part, {
		open: (name, a) => {
			runs.open(name, a);
			if (name === 'si') text = '';
			else if (name === 'rPh') phonetic++;
			else if (name === 't') collecting = phonetic === 0;
		},
		text: (piece) => {
			if (collecting && text.length <= CELL_TEXT) text += runs.of(piece.slice(0, CELL_TEXT));
		},
		close: (name) => {
			runs.close(name);
			if (name === 't') collecting = false;
			else if (name === 'rPh') phonetic--;
			else if (name === 'si') {
				characters += text.length;
				if (characters > limits.textCharacters || strings.length >= limits.cells)
					throw new SheetRefusal(
						'too-many-cells',
						`The workbook holds more text than is read at once (${limits.textCharacters.toLocaleString('en')} characters). Keep only the sheet with the assay values and upload that.`
					);
				strings.push(ownText(text.slice(0, CELL_TEXT)));
			}
		}
	});
	return strings;
}

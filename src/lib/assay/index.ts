/** The sheet reader's pure part: what a workbook holds, what has to be asked, and the run that results. */
export { propose, proposeBlock, type ProposeOptions } from './propose';
export { timeForm, type TimeForm } from './time-form';
export { settle, type SettleInput } from './settle';
export { toSavedMapping } from './saved-mapping';
export { address, columnLetter, columnNumber, displayText, parseAddress, rangeText, SheetView } from './grid';
export { CHECKS, type Checks } from './examination';
export { durationWords } from './plausibility';
export { sentenceToConfirm } from './seen-in-lab';
export { templateSheets, type TemplateSheet } from './template';
export { diffWorkbooks, type CellChange, type WorkbookDifference } from './diff';

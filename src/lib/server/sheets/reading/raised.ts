/**
 * Superscript runs of a rich text, kept apart from the digits before them: "0.4" with a raised footnote "1" must not become 0.41,
 * and "10" with a raised "-3" not 10-3.
 */
const SIGNS: Record<string, string> = { '+': '⁺', '-': '⁻', '−': '⁻', '(': '⁽', ')': '⁾' };

const raise = (text: string): string =>
	text.replace(/[\d+\-−()]/g, (sign) => SIGNS[sign] ?? '⁰¹²³⁴⁵⁶⁷⁸⁹'[Number(sign)]);

/** Follows the runs of a text; `of` gives a piece of the present run as it was seen. */
export class RaisedRuns {
	private raised = false;

	open(name: string, a: Readonly<Record<string, string>>): void {
		if (name === 'vertAlign') this.raised = a.val === 'superscript';
		else if (name === 'r' || name === 'si' || name === 'is') this.raised = false;
	}

	close(name: string): void {
		if (name === 'r' || name === 'si' || name === 'is') this.raised = false;
	}

	of(piece: string): string {
		return this.raised ? raise(piece) : piece;
	}
}

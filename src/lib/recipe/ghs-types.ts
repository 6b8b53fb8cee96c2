/** One statement of the GHS list offered in the page. */
export interface GhsStatement {
	code: string;
	text: string;
	/** No longer in the 10th revised edition; older safety data sheets may carry it. */
	deleted: boolean;
	/** A typing error of the stored table was put right. */
	corrected: boolean;
}

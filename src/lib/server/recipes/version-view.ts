import type { Caution } from '$lib/recipe/cautions';
import { chargesAt, type ChargesTable } from '$lib/recipe/charges';
import { concentrationOf } from '$lib/recipe/set-points';
import { recipeContent, type RecipeContent, type RecipeState } from '$lib/schemas/recipe';
import {
	CautionAcknowledgement,
	Fit,
	Signature,
	User,
	type Recipe,
	type RecipeVersion
} from '../database/models';
import type { Confirmation } from './confirmation';
import { cautionsOf } from './caution-facts';
import { fitRuns } from './fit-facts';
import { shortHash } from './signed-record';

export interface SignatureView {
	id: string;
	meaning: string;
	printedName: string;
	userId: string;
	/** UTC; the page shows the site's time zone. */
	signedAt: Date;
	comment: string | null;
	contentHash: string;
	confirmation: Confirmation | null;
}

export interface CautionView extends Caution {
	readBy: { printedName: string; userId: string; groupId: string; at: Date }[];
}

/** What everybody sees of a version, own group and reader alike. */
export interface VersionView {
	recipeId: string;
	recipeNumber: number;
	id: string;
	number: number;
	state: RecipeState;
	/** For optimistic locking, and for what a signature names. */
	version: number;
	contentHash: string;
	shortHash: string;
	content: RecipeContent;
	charges: ChargesTable;
	reason: string | null;
	author: string;
	submittedAt: Date | null;
	updatedAt: Date;
	createdAt: Date;
	cautions: CautionView[];
	signatures: SignatureView[];
	/** Runs of the fit that have been revised since. */
	supersededData: { runNumber: number; used: number; current: number }[];
}

async function cautionViews(
	version: RecipeVersion,
	content: RecipeContent,
	fit: Fit
): Promise<CautionView[]> {
	const [present, read] = await Promise.all([
		cautionsOf(content, fit),
		CautionAcknowledgement.findAll({
			where: { recipeVersionId: version.id },
			order: [['createdAt', 'ASC']]
		})
	]);
	return present.map((caution) => ({
		...caution,
		readBy: read
			.filter((r) => r.cautionKey === caution.key)
			.map((r) => ({ printedName: r.printedName, userId: r.userId, groupId: r.groupId, at: r.createdAt }))
	}));
}

export async function signaturesOf(versionId: string): Promise<SignatureView[]> {
	const rows = await Signature.findAll({
		where: { recipeVersionId: versionId },
		order: [
			['signedAt', 'ASC'],
			['id', 'ASC']
		]
	});
	return rows.map((s) => ({
		id: s.id,
		meaning: s.meaning,
		printedName: s.printedName,
		userId: s.userId,
		signedAt: s.signedAt,
		comment: s.comment,
		contentHash: s.contentHash,
		confirmation: (s.detail as { confirmation?: Confirmation } | null)?.confirmation ?? null
	}));
}

/** The version as everybody who may see it sees it. */
export async function versionView(recipe: Recipe, version: RecipeVersion): Promise<VersionView> {
	const content = recipeContent.parse(version.content);
	const fit = await Fit.findByPk(version.fitId, { rejectOnEmpty: true });
	const [cautions, signatures, author, runs] = await Promise.all([
		cautionViews(version, content, fit),
		signaturesOf(version.id),
		User.findByPk(version.authorId, { attributes: ['id', 'name'] }),
		fitRuns(version.fitId)
	]);
	const authored = signatures.find((s) => s.meaning === 'Authored');
	return {
		recipeId: recipe.id,
		recipeNumber: recipe.number,
		id: version.id,
		number: version.number,
		state: version.state,
		version: version.version,
		contentHash: version.contentHash,
		shortHash: shortHash(version.contentHash),
		content,
		charges: chargesAt(content.charges, content.scale, concentrationOf(content)),
		reason: version.reason,
		author: authored?.printedName ?? author?.name ?? 'somebody who has left',
		submittedAt: version.submittedAt,
		updatedAt: version.updatedAt,
		createdAt: version.createdAt,
		cautions,
		signatures,
		supersededData: runs
			.filter((r) => r.current > r.revision)
			.map((r) => ({ runNumber: r.number, used: r.revision, current: r.current }))
	};
}

import {
	DataTypes,
	Model,
	type CreationOptional,
	type InferAttributes,
	type InferCreationAttributes,
	type Sequelize
} from 'sequelize';
import type { RecipeState } from '$lib/schemas/recipe';
import { identity, options } from './common';

export class Recipe extends Model<InferAttributes<Recipe>, InferCreationAttributes<Recipe>> {
	declare id: CreationOptional<string>;
	declare studyId: string;
	declare groupId: string;
	declare number: number;
	declare title: string;
	declare version: CreationOptional<number>;
	declare createdById: string;
	declare updatedAt: Date;
	declare createdAt: CreationOptional<Date>;
}

function initRecipe(sequelize: Sequelize): void {
	Recipe.init(
		{
			...identity(),
			studyId: { type: DataTypes.UUID, allowNull: false },
			groupId: { type: DataTypes.UUID, allowNull: false },
			number: { type: DataTypes.INTEGER, allowNull: false },
			title: { type: DataTypes.STRING, allowNull: false },
			version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
			createdById: { type: DataTypes.UUID, allowNull: false },
			updatedAt: { type: DataTypes.DATE, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'recipes')
	);
}

export class RecipeVersion extends Model<
	InferAttributes<RecipeVersion>,
	InferCreationAttributes<RecipeVersion>
> {
	declare id: CreationOptional<string>;
	declare recipeId: string;
	declare number: number;
	declare state: RecipeState;
	declare content: unknown;
	declare contentHash: string;
	declare fitId: string;
	declare windowId: CreationOptional<string | null>;
	declare version: CreationOptional<number>;
	declare reason: CreationOptional<string | null>;
	declare authorId: string;
	/** Everybody who wrote content of this version: none of them may validate it. */
	declare contributorIds: CreationOptional<string[]>;
	declare submittedAt: CreationOptional<Date | null>;
	declare updatedAt: Date;
	declare createdAt: CreationOptional<Date>;
}

function initRecipeVersion(sequelize: Sequelize): void {
	RecipeVersion.init(
		{
			...identity(),
			recipeId: { type: DataTypes.UUID, allowNull: false },
			number: { type: DataTypes.INTEGER, allowNull: false },
			state: { type: DataTypes.STRING, allowNull: false },
			content: { type: DataTypes.JSON, allowNull: false },
			contentHash: { type: DataTypes.STRING, allowNull: false },
			fitId: { type: DataTypes.UUID, allowNull: false },
			windowId: { type: DataTypes.UUID, allowNull: true },
			version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
			reason: { type: DataTypes.TEXT, allowNull: true },
			authorId: { type: DataTypes.UUID, allowNull: false },
			contributorIds: { type: DataTypes.JSON, allowNull: false, defaultValue: [] },
			submittedAt: { type: DataTypes.DATE, allowNull: true },
			updatedAt: { type: DataTypes.DATE, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'recipe_versions')
	);
}

export class ReviewComment extends Model<
	InferAttributes<ReviewComment>,
	InferCreationAttributes<ReviewComment>
> {
	declare id: CreationOptional<string>;
	declare recipeVersionId: string;
	declare userId: string;
	declare printedName: string;
	declare text: string;
	declare anchor: CreationOptional<string | null>;
	declare createdAt: CreationOptional<Date>;
}

function initReviewComment(sequelize: Sequelize): void {
	ReviewComment.init(
		{
			...identity(),
			recipeVersionId: { type: DataTypes.UUID, allowNull: false },
			userId: { type: DataTypes.UUID, allowNull: false },
			printedName: { type: DataTypes.STRING, allowNull: false },
			text: { type: DataTypes.TEXT, allowNull: false },
			anchor: { type: DataTypes.STRING, allowNull: true },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'review_comments')
	);
}

export class Signature extends Model<InferAttributes<Signature>, InferCreationAttributes<Signature>> {
	declare id: CreationOptional<string>;
	declare recipeVersionId: string;
	declare userId: string;
	declare printedName: string;
	declare meaning: string;
	declare contentHash: string;
	declare comment: CreationOptional<string | null>;
	declare detail: CreationOptional<object | null>;
	declare signedAt: Date;
	declare createdAt: CreationOptional<Date>;
}

function initSignature(sequelize: Sequelize): void {
	Signature.init(
		{
			...identity(),
			recipeVersionId: { type: DataTypes.UUID, allowNull: false },
			userId: { type: DataTypes.UUID, allowNull: false },
			printedName: { type: DataTypes.STRING, allowNull: false },
			meaning: { type: DataTypes.STRING, allowNull: false },
			contentHash: { type: DataTypes.STRING, allowNull: false },
			comment: { type: DataTypes.TEXT, allowNull: true },
			detail: { type: DataTypes.JSON, allowNull: true },
			signedAt: { type: DataTypes.DATE, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'signatures')
	);
}

export class Share extends Model<InferAttributes<Share>, InferCreationAttributes<Share>> {
	declare id: CreationOptional<string>;
	declare recipeVersionId: string;
	declare groupId: string;
	declare sharedById: string;
	declare endedAt: CreationOptional<Date | null>;
	declare createdAt: CreationOptional<Date>;
}

function initShare(sequelize: Sequelize): void {
	Share.init(
		{
			...identity(),
			recipeVersionId: { type: DataTypes.UUID, allowNull: false },
			groupId: { type: DataTypes.UUID, allowNull: false },
			sharedById: { type: DataTypes.UUID, allowNull: false },
			endedAt: { type: DataTypes.DATE, allowNull: true },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'shares')
	);
}

export class CautionAcknowledgement extends Model<
	InferAttributes<CautionAcknowledgement>,
	InferCreationAttributes<CautionAcknowledgement>
> {
	declare id: CreationOptional<string>;
	declare recipeVersionId: string;
	declare cautionKey: string;
	declare userId: string;
	declare printedName: string;
	declare groupId: string;
	declare createdAt: CreationOptional<Date>;
}

function initCautionAcknowledgement(sequelize: Sequelize): void {
	CautionAcknowledgement.init(
		{
			...identity(),
			recipeVersionId: { type: DataTypes.UUID, allowNull: false },
			cautionKey: { type: DataTypes.STRING, allowNull: false },
			userId: { type: DataTypes.UUID, allowNull: false },
			printedName: { type: DataTypes.STRING, allowNull: false },
			groupId: { type: DataTypes.UUID, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'caution_acknowledgements')
	);
}

export class WorkbookExport extends Model<
	InferAttributes<WorkbookExport>,
	InferCreationAttributes<WorkbookExport>
> {
	declare id: CreationOptional<string>;
	declare recipeVersionId: string;
	declare groupId: string;
	declare sha256: string;
	declare size: number;
	declare bytes: Buffer;
	declare exportedById: string;
	declare createdAt: CreationOptional<Date>;
}

function initWorkbookExport(sequelize: Sequelize): void {
	WorkbookExport.init(
		{
			...identity(),
			recipeVersionId: { type: DataTypes.UUID, allowNull: false },
			groupId: { type: DataTypes.UUID, allowNull: false },
			sha256: { type: DataTypes.STRING, allowNull: false },
			size: { type: DataTypes.INTEGER, allowNull: false },
			bytes: { type: DataTypes.BLOB('long'), allowNull: false },
			exportedById: { type: DataTypes.UUID, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'exports')
	);
}

export function initRecipes(sequelize: Sequelize): void {
	initRecipe(sequelize);
	initRecipeVersion(sequelize);
	initReviewComment(sequelize);
	initSignature(sequelize);
	initShare(sequelize);
	initCautionAcknowledgement(sequelize);
	initWorkbookExport(sequelize);
}

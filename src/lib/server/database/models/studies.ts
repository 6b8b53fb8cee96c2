import {
	DataTypes,
	Model,
	type CreationOptional,
	type InferAttributes,
	type InferCreationAttributes,
	type Sequelize
} from 'sequelize';
import type { CriterionContent } from '$lib/schemas/study';
import type { RunContent } from '$lib/schemas/run';
import type { SchemeContent } from '$lib/schemas/scheme';
import { identity, options } from './common';

export class Study extends Model<InferAttributes<Study>, InferCreationAttributes<Study>> {
	declare id: CreationOptional<string>;
	declare groupId: string;
	declare name: string;
	declare decision: string;
	declare version: CreationOptional<number>;
	declare archivedAt: CreationOptional<Date | null>;
	declare createdById: string;
	declare updatedAt: Date;
	declare createdAt: CreationOptional<Date>;
}

function initStudy(sequelize: Sequelize): void {
	Study.init(
		{
			...identity(),
			groupId: { type: DataTypes.UUID, allowNull: false },
			name: { type: DataTypes.STRING, allowNull: false },
			decision: { type: DataTypes.TEXT, allowNull: false },
			version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
			archivedAt: { type: DataTypes.DATE, allowNull: true },
			createdById: { type: DataTypes.UUID, allowNull: false },
			updatedAt: { type: DataTypes.DATE, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'studies')
	);
}

export class Criterion extends Model<InferAttributes<Criterion>, InferCreationAttributes<Criterion>> {
	declare id: CreationOptional<string>;
	declare studyId: string;
	declare position: number;
	declare content: CriterionContent;
	declare createdAt: CreationOptional<Date>;
}

function initCriterion(sequelize: Sequelize): void {
	Criterion.init(
		{
			...identity(),
			studyId: { type: DataTypes.UUID, allowNull: false },
			position: { type: DataTypes.INTEGER, allowNull: false },
			content: { type: DataTypes.JSON, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'criteria')
	);
}

export class Scheme extends Model<InferAttributes<Scheme>, InferCreationAttributes<Scheme>> {
	declare id: CreationOptional<string>;
	declare studyId: string;
	declare groupId: string;
	declare name: string;
	declare position: number;
	declare version: CreationOptional<number>;
	declare archivedAt: CreationOptional<Date | null>;
	declare createdById: string;
	declare updatedAt: Date;
	declare createdAt: CreationOptional<Date>;
}

function initScheme(sequelize: Sequelize): void {
	Scheme.init(
		{
			...identity(),
			studyId: { type: DataTypes.UUID, allowNull: false },
			groupId: { type: DataTypes.UUID, allowNull: false },
			name: { type: DataTypes.STRING, allowNull: false },
			position: { type: DataTypes.INTEGER, allowNull: false },
			version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
			archivedAt: { type: DataTypes.DATE, allowNull: true },
			createdById: { type: DataTypes.UUID, allowNull: false },
			updatedAt: { type: DataTypes.DATE, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'schemes')
	);
}

export class SchemeVersion extends Model<
	InferAttributes<SchemeVersion>,
	InferCreationAttributes<SchemeVersion>
> {
	declare id: CreationOptional<string>;
	declare schemeId: string;
	declare number: number;
	declare content: SchemeContent;
	declare contentHash: string;
	declare createdById: string;
	declare createdAt: CreationOptional<Date>;
}

function initSchemeVersion(sequelize: Sequelize): void {
	SchemeVersion.init(
		{
			...identity(),
			schemeId: { type: DataTypes.UUID, allowNull: false },
			number: { type: DataTypes.INTEGER, allowNull: false },
			content: { type: DataTypes.JSON, allowNull: false },
			contentHash: { type: DataTypes.STRING, allowNull: false },
			createdById: { type: DataTypes.UUID, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'scheme_versions')
	);
}

export class Sheet extends Model<InferAttributes<Sheet>, InferCreationAttributes<Sheet>> {
	declare id: CreationOptional<string>;
	declare studyId: string;
	declare groupId: string;
	declare fileName: string;
	declare mediaType: string;
	declare size: number;
	declare sha256: string;
	declare bytes: Buffer;
	declare reading: CreationOptional<object | null>;
	declare work: CreationOptional<object | null>;
	declare version: CreationOptional<number>;
	declare uploadedById: string;
	declare createdAt: CreationOptional<Date>;
}

function initSheet(sequelize: Sequelize): void {
	Sheet.init(
		{
			...identity(),
			studyId: { type: DataTypes.UUID, allowNull: false },
			groupId: { type: DataTypes.UUID, allowNull: false },
			fileName: { type: DataTypes.STRING, allowNull: false },
			mediaType: { type: DataTypes.STRING, allowNull: false },
			size: { type: DataTypes.INTEGER, allowNull: false },
			sha256: { type: DataTypes.STRING, allowNull: false },
			bytes: { type: DataTypes.BLOB('long'), allowNull: false },
			reading: { type: DataTypes.JSON, allowNull: true },
			work: { type: DataTypes.JSON, allowNull: true },
			version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
			uploadedById: { type: DataTypes.UUID, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'sheets')
	);
}

export class Mapping extends Model<InferAttributes<Mapping>, InferCreationAttributes<Mapping>> {
	declare id: CreationOptional<string>;
	declare groupId: string;
	declare headerSignature: string;
	declare content: unknown;
	declare createdById: string;
	declare updatedAt: Date;
	declare createdAt: CreationOptional<Date>;
}

function initMapping(sequelize: Sequelize): void {
	Mapping.init(
		{
			...identity(),
			groupId: { type: DataTypes.UUID, allowNull: false },
			headerSignature: { type: DataTypes.STRING, allowNull: false },
			content: { type: DataTypes.JSON, allowNull: false },
			createdById: { type: DataTypes.UUID, allowNull: false },
			updatedAt: { type: DataTypes.DATE, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'mappings')
	);
}

export class Run extends Model<InferAttributes<Run>, InferCreationAttributes<Run>> {
	declare id: CreationOptional<string>;
	declare studyId: string;
	declare groupId: string;
	declare number: number;
	declare name: string;
	declare currentRevisionId: CreationOptional<string | null>;
	declare version: CreationOptional<number>;
	declare archivedAt: CreationOptional<Date | null>;
	declare createdById: string;
	declare updatedAt: Date;
	declare createdAt: CreationOptional<Date>;
}

function initRun(sequelize: Sequelize): void {
	Run.init(
		{
			...identity(),
			studyId: { type: DataTypes.UUID, allowNull: false },
			groupId: { type: DataTypes.UUID, allowNull: false },
			number: { type: DataTypes.INTEGER, allowNull: false },
			name: { type: DataTypes.STRING, allowNull: false },
			currentRevisionId: { type: DataTypes.STRING, allowNull: true },
			version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
			archivedAt: { type: DataTypes.DATE, allowNull: true },
			createdById: { type: DataTypes.UUID, allowNull: false },
			updatedAt: { type: DataTypes.DATE, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'runs')
	);
}

export class RunRevision extends Model<InferAttributes<RunRevision>, InferCreationAttributes<RunRevision>> {
	declare id: CreationOptional<string>;
	declare runId: string;
	declare number: number;
	declare sheetId: CreationOptional<string | null>;
	declare tableKey: CreationOptional<string | null>;
	declare content: RunContent;
	declare contentHash: string;
	declare reason: CreationOptional<string | null>;
	declare createdById: string;
	declare createdAt: CreationOptional<Date>;
}

function initRunRevision(sequelize: Sequelize): void {
	RunRevision.init(
		{
			...identity(),
			runId: { type: DataTypes.UUID, allowNull: false },
			number: { type: DataTypes.INTEGER, allowNull: false },
			sheetId: { type: DataTypes.UUID, allowNull: true },
			tableKey: { type: DataTypes.STRING, allowNull: true },
			content: { type: DataTypes.JSON, allowNull: false },
			contentHash: { type: DataTypes.STRING, allowNull: false },
			reason: { type: DataTypes.TEXT, allowNull: true },
			createdById: { type: DataTypes.UUID, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'run_revisions')
	);
}

export function initStudies(sequelize: Sequelize): void {
	initStudy(sequelize);
	initCriterion(sequelize);
	initScheme(sequelize);
	initSchemeVersion(sequelize);
	initSheet(sequelize);
	initMapping(sequelize);
	initRun(sequelize);
	initRunRevision(sequelize);
}

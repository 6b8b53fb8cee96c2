import {
	DataTypes,
	Model,
	type CreationOptional,
	type InferAttributes,
	type InferCreationAttributes,
	type Sequelize
} from 'sequelize';
import { options } from './common';

/** One entry of the audit trail. `at` is kept as the text that was hashed. */
export class AuditEvent extends Model<InferAttributes<AuditEvent>, InferCreationAttributes<AuditEvent>> {
	declare seq: number;
	declare at: string;
	declare userId: CreationOptional<string | null>;
	declare printedName: string;
	declare role: CreationOptional<string | null>;
	declare source: string;
	declare groupId: CreationOptional<string | null>;
	declare studyId: CreationOptional<string | null>;
	declare objectType: string;
	declare objectId: CreationOptional<string | null>;
	declare objectVersion: CreationOptional<number | null>;
	declare type: string;
	declare payload: string;
	declare reason: CreationOptional<string | null>;
	declare prevHash: string;
	declare hash: string;
}

export function initAudit(sequelize: Sequelize): void {
	AuditEvent.init(
		{
			seq: { type: DataTypes.INTEGER, primaryKey: true, allowNull: false },
			at: { type: DataTypes.STRING, allowNull: false },
			userId: { type: DataTypes.UUID, allowNull: true },
			printedName: { type: DataTypes.STRING, allowNull: false },
			role: { type: DataTypes.STRING, allowNull: true },
			source: { type: DataTypes.STRING, allowNull: false },
			groupId: { type: DataTypes.UUID, allowNull: true },
			studyId: { type: DataTypes.UUID, allowNull: true },
			objectType: { type: DataTypes.STRING, allowNull: false },
			objectId: { type: DataTypes.UUID, allowNull: true },
			objectVersion: { type: DataTypes.INTEGER, allowNull: true },
			type: { type: DataTypes.STRING, allowNull: false },
			payload: { type: DataTypes.TEXT, allowNull: false },
			reason: { type: DataTypes.TEXT, allowNull: true },
			prevHash: { type: DataTypes.STRING, allowNull: false },
			hash: { type: DataTypes.STRING, allowNull: false }
		},
		options(sequelize, 'audit_events')
	);
}

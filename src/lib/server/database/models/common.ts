import { DataTypes, type InitOptions, type Model, type Sequelize } from 'sequelize';
import { v7 as uuidv7 } from 'uuid';

/** Time-ordered keys: lists page by key, and an id tells nothing about its neighbours. */
export const newId = (): string => uuidv7();

export const identity = () => ({
	id: { type: DataTypes.UUID, primaryKey: true, allowNull: false, defaultValue: newId }
});

export function options<M extends Model>(sequelize: Sequelize, tableName: string): InitOptions<M> {
	return { sequelize, tableName, underscored: true, timestamps: false };
}

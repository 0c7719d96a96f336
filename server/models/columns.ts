import { DataTypes } from "sequelize";

/**
 * Column definitions that recur, made anew for each use: Sequelize writes the column's name into what it is given.
 * Levels are DOUBLE and days DATEONLY: DECIMAL and BIGINT would arrive as strings.
 */
export const id = () => ({
  type: DataTypes.UUID,
  primaryKey: true,
  defaultValue: DataTypes.UUIDV4,
});
export const uuid = () => ({ type: DataTypes.UUID, allowNull: false });
export const uuidOrNull = () => ({ type: DataTypes.UUID, allowNull: true });
export const text = () => ({ type: DataTypes.TEXT, allowNull: false });
export const textOrNull = () => ({ type: DataTypes.TEXT, allowNull: true });
export const texts = () => ({
  type: DataTypes.ARRAY(DataTypes.TEXT),
  allowNull: false,
  defaultValue: [],
});
export const whole = () => ({ type: DataTypes.INTEGER, allowNull: false });

export const numberOrNull = () => ({ type: DataTypes.DOUBLE, allowNull: true });
export const wholeOrNull = () => ({ type: DataTypes.INTEGER, allowNull: true });
export const flag = () => ({ type: DataTypes.BOOLEAN, allowNull: false, defaultValue: false });
export const day = () => ({ type: DataTypes.DATEONLY, allowNull: false });
export const dayOrNull = () => ({ type: DataTypes.DATEONLY, allowNull: true });
export const instant = () => ({ type: DataTypes.DATE, allowNull: false });
export const instantOrNull = () => ({ type: DataTypes.DATE, allowNull: true });
export const json = () => ({ type: DataTypes.JSONB, allowNull: false });
export const jsonOrNull = () => ({ type: DataTypes.JSONB, allowNull: true });
/** Counts up with every change; If-Match is held against it. */
export const revision = () => ({ type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 });

import { DataTypes } from 'sequelize';

/** Column kinds that every table shares. */
export const id = () => ({ type: DataTypes.UUID, defaultValue: DataTypes.UUIDV4, primaryKey: true });
export const foreignKey = (allowNull = false) => ({ type: DataTypes.UUID, allowNull });
/** An instant in UTC to the millisecond. */
export const instant = (allowNull = false) => ({ type: DataTypes.DATE(3), allowNull });
export const text = (length: number, allowNull = false) => ({ type: DataTypes.STRING(length), allowNull });
export const count = (allowNull = false) => ({ type: DataTypes.INTEGER, allowNull });
export const real = (allowNull = false) => ({ type: DataTypes.DOUBLE, allowNull });
export const flag = () => ({ type: DataTypes.BOOLEAN, allowNull: false, defaultValue: false });
export const json = (allowNull = false) => ({ type: DataTypes.JSON, allowNull });
export const bytes = (allowNull = false) => ({ type: DataTypes.BLOB('long'), allowNull });
export const sha256 = () => ({ type: DataTypes.CHAR(64), allowNull: false });

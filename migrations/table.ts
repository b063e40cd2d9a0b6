import { DataTypes, type ModelAttributes, type QueryInterface } from 'sequelize';

export interface MigrationContext {
  context: QueryInterface;
}

/** Column kinds; ids are compared byte by byte and every foreign key has the same type. */
export const uuid = 'CHAR(36) BINARY';
export const id = { type: uuid, primaryKey: true, allowNull: false };
export const instant = { type: DataTypes.DATE(3), allowNull: false };
export const maybeInstant = { type: DataTypes.DATE(3), allowNull: true };
export const count = { type: DataTypes.INTEGER, allowNull: false };
export const real = { type: DataTypes.DOUBLE, allowNull: false };
export const flag = { type: DataTypes.BOOLEAN, allowNull: false, defaultValue: false };
export const json = { type: DataTypes.JSON, allowNull: false };
export const bytes = { type: DataTypes.BLOB('long'), allowNull: false };
export const sha256 = { type: DataTypes.CHAR(64), allowNull: false };
export const text = (length: number) => ({ type: DataTypes.STRING(length), allowNull: false });
export const maybe = <T extends object>(column: T) => ({ ...column, allowNull: true });

/** A column that points at another table's id; what it points at can't be deleted unless `cascade`. */
export const reference = (table: string, cascade = false) => ({
  type: uuid,
  allowNull: false,
  references: { model: table, key: 'id' },
  onDelete: cascade ? 'CASCADE' : 'RESTRICT',
  onUpdate: 'RESTRICT',
});

/** One table with its unique keys and plain indexes, declared in a single statement. */
export function table(name: string, columns: ModelAttributes, unique: Record<string, string[]> = {}) {
  return {
    up: ({ context }: MigrationContext) =>
      context.createTable(name, columns, {
        charset: 'utf8mb4',
        collate: 'utf8mb4_unicode_ci',
        uniqueKeys: Object.fromEntries(Object.entries(unique).map(([key, fields]) => [key, { fields }])),
      }),
    down: ({ context }: MigrationContext) => context.dropTable(name),
  };
}

import { Model, type Sequelize } from 'sequelize';
import type { CreationOptional, InferAttributes, InferCreationAttributes } from 'sequelize';
import { DataTypes } from 'sequelize';
import { count, foreignKey, id, instant, json, text } from './columns';

/** One inference, numbered within its group. Its settings are in its revisions. */
export class Notebook extends Model<InferAttributes<Notebook>, InferCreationAttributes<Notebook>> {
  declare id: CreationOptional<string>;
  declare groupId: string;
  declare number: number;
  declare title: string;
  /** Number of the revision that stands. */
  declare revision: number;
  declare measurementVersionId: string;
  declare createdBy: string;
  declare createdAt: Date;
  declare updatedBy: string;
  declare updatedAt: Date;
  declare archivedAt: CreationOptional<Date | null>;
  declare archivedBy: CreationOptional<string | null>;
  declare origin: CreationOptional<NotebookOrigin | null>;
}

/** What a notebook was copied from, as it was called then. */
export interface NotebookOrigin {
  number: number;
  title: string;
  revision: number;
  /** Number of the fit whose snapshot it took; null for the revision itself. */
  fit: number | null;
  /** Bins that were left out there and aren't in the measurement it was copied to; absent where there are none. */
  droppedBins?: number;
}

/** The settings of sections 1, 2 and 4, complete, as of one revision. */
export interface NotebookSettings {
  cuts: {
    kappaMin?: number;
    kappaMax?: number;
    /** Single bins left out, ascending; absent where there are none. */
    excluded?: { bin: number; reason: string; kappa?: [number, number] }[];
  };
  likelihood: { kind: string };
  template: { id: string; version: number; options: Record<string, unknown> };
  priors: Record<string, { kind: string } & Record<string, unknown>>;
  /** Versions of further measurements that are fitted with the first, in their order, by id; absent where there are none. */
  also?: { version: string; cuts: NotebookSettings['cuts'] }[];
  /** Present where row i of everyone's mocks is of one simulated sky. */
  sharedMocks?: true;
}

/** A revision is written once and never changed. */
export class NotebookRevision extends Model<
  InferAttributes<NotebookRevision>,
  InferCreationAttributes<NotebookRevision>
> {
  declare id: CreationOptional<string>;
  declare notebookId: string;
  declare revision: number;
  declare title: string;
  declare settings: NotebookSettings;
  /** The group's words where this revision changed them; null where they stand as before. */
  declare statement: CreationOptional<string | null>;
  /** Sections that this revision changed. */
  declare sections: string[];
  /** The revision whose settings it brought back. */
  declare restoredFrom: CreationOptional<number | null>;
  declare createdBy: string;
  declare createdAt: Date;
}

export function initNotebookModels(sequelize: Sequelize): void {
  const plain = { sequelize, timestamps: false, underscored: true } as const;
  Notebook.init(
    {
      id: id(),
      groupId: foreignKey(),
      number: count(),
      title: text(160),
      revision: count(),
      measurementVersionId: foreignKey(),
      createdBy: foreignKey(),
      createdAt: instant(),
      updatedBy: foreignKey(),
      updatedAt: instant(),
      archivedAt: instant(true),
      archivedBy: foreignKey(true),
      origin: json(true),
    },
    { ...plain, modelName: 'notebook', tableName: 'notebooks' },
  );
  NotebookRevision.init(
    {
      id: id(),
      notebookId: foreignKey(),
      revision: count(),
      title: text(160),
      settings: json(),
      statement: { type: DataTypes.TEXT, allowNull: true },
      sections: json(),
      restoredFrom: count(true),
      createdBy: foreignKey(),
      createdAt: instant(),
    },
    { ...plain, modelName: 'notebookRevision', tableName: 'notebook_revisions' },
  );
}

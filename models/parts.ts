import { Model, type Sequelize } from 'sequelize';
import type { CreationOptional, InferAttributes, InferCreationAttributes } from 'sequelize';
import { count, foreignKey, id } from './columns';

/** A further measurement of a notebook as it stands. `place` counts from 1; the first measurement is in the notebook's own row. */
export class NotebookPart extends Model<
  InferAttributes<NotebookPart>,
  InferCreationAttributes<NotebookPart>
> {
  declare id: CreationOptional<string>;
  declare notebookId: string;
  declare place: number;
  declare measurementVersionId: string;
}

/** A further measurement that a fit was made from, in the place in which its snapshot has it. */
export class FitPart extends Model<InferAttributes<FitPart>, InferCreationAttributes<FitPart>> {
  declare id: CreationOptional<string>;
  declare fitId: string;
  declare place: number;
  declare measurementVersionId: string;
}

export function initPartModels(sequelize: Sequelize): void {
  const plain = { sequelize, timestamps: false, underscored: true } as const;
  NotebookPart.init(
    { id: id(), notebookId: foreignKey(), place: count(), measurementVersionId: foreignKey() },
    { ...plain, modelName: 'notebookPart', tableName: 'notebook_parts' },
  );
  FitPart.init(
    { id: id(), fitId: foreignKey(), place: count(), measurementVersionId: foreignKey() },
    { ...plain, modelName: 'fitPart', tableName: 'fit_parts' },
  );
}

import { Model, type Sequelize } from 'sequelize';
import type { CreationOptional, InferAttributes, InferCreationAttributes } from 'sequelize';
import { count, foreignKey, id, instant, text } from './columns';

/** How many fits may run at once: of the group whose id is `scope`, or of every other group (`site`). */
export class FitLimit extends Model<InferAttributes<FitLimit>, InferCreationAttributes<FitLimit>> {
  declare scope: string;
  declare fits: number;
  declare setBy: string;
  declare setAt: Date;
}

/** A mail about the end of a fit, written in the transaction that ended it and sent afterwards. */
export class FitMail extends Model<InferAttributes<FitMail>, InferCreationAttributes<FitMail>> {
  declare id: CreationOptional<string>;
  declare fitId: string;
  /** Of the hold under which the fit ended; a fit that goes on and ends again has another. */
  declare epoch: number;
  declare userId: string;
  declare endedAs: string;
  declare createdAt: Date;
  declare attempts: CreationOptional<number>;
  declare heldUntil: CreationOptional<Date | null>;
  declare sentAt: CreationOptional<Date | null>;
}

export function initFitQueueModels(sequelize: Sequelize): void {
  const plain = { sequelize, timestamps: false, underscored: true } as const;
  FitLimit.init(
    { scope: { ...text(36), primaryKey: true }, fits: count(), setBy: foreignKey(), setAt: instant() },
    { ...plain, modelName: 'fitLimit', tableName: 'fit_limits' },
  );
  FitMail.init(
    {
      id: id(),
      fitId: foreignKey(),
      epoch: count(),
      userId: foreignKey(),
      endedAs: text(16),
      createdAt: instant(),
      attempts: { ...count(), defaultValue: 0 },
      heldUntil: instant(true),
      sentAt: instant(true),
    },
    { ...plain, modelName: 'fitMail', tableName: 'fit_mails' },
  );
}

import { Model, type Sequelize } from 'sequelize';
import type { CreationOptional, InferAttributes, InferCreationAttributes } from 'sequelize';
import { foreignKey, id, instant, json, text } from './columns';

/** A working group. */
export class Group extends Model<InferAttributes<Group>, InferCreationAttributes<Group>> {
  declare id: CreationOptional<string>;
  declare name: string;
  declare createdAt: Date;
}

/** A person's role in a group: lead, analyst, referee or reader. */
export class Membership extends Model<InferAttributes<Membership>, InferCreationAttributes<Membership>> {
  declare id: CreationOptional<string>;
  declare groupId: string;
  declare userId: string;
  declare role: string;
  declare createdAt: Date;
}

/** An invitation by e-mail; it turns into a membership when that address signs in. */
export class Invitation extends Model<InferAttributes<Invitation>, InferCreationAttributes<Invitation>> {
  declare id: CreationOptional<string>;
  declare groupId: string;
  declare email: string;
  declare role: string;
  declare invitedBy: string;
  declare createdAt: Date;
  declare acceptedAt: CreationOptional<Date | null>;
  /** When its mail last went out; null where it never did. */
  declare sentAt: CreationOptional<Date | null>;
}

/** Who did what when; never changed, never deleted. Holds no measured or fitted value. */
export class AuditEvent extends Model<InferAttributes<AuditEvent>, InferCreationAttributes<AuditEvent>> {
  declare id: CreationOptional<string>;
  declare groupId: string;
  declare actorId: string | null;
  declare action: string;
  declare subjectType: string;
  declare subjectId: string | null;
  declare details: CreationOptional<Record<string, unknown> | null>;
  declare createdAt: Date;
}

export function initGroupModels(sequelize: Sequelize): void {
  const plain = { sequelize, timestamps: false, underscored: true } as const;
  Group.init(
    { id: id(), name: text(120), createdAt: instant() },
    { ...plain, modelName: 'group', tableName: 'groups' },
  );
  Membership.init(
    { id: id(), groupId: foreignKey(), userId: foreignKey(), role: text(16), createdAt: instant() },
    { ...plain, modelName: 'membership', tableName: 'memberships' },
  );
  Invitation.init(
    {
      id: id(),
      groupId: foreignKey(),
      email: text(255),
      role: text(16),
      invitedBy: foreignKey(),
      createdAt: instant(),
      acceptedAt: instant(true),
      sentAt: instant(true),
    },
    { ...plain, modelName: 'invitation', tableName: 'invitations' },
  );
  AuditEvent.init(
    {
      id: id(),
      groupId: foreignKey(),
      actorId: foreignKey(true),
      action: text(64),
      subjectType: text(32),
      subjectId: foreignKey(true),
      details: json(true),
      createdAt: instant(),
    },
    { ...plain, modelName: 'auditEvent', tableName: 'audit_events' },
  );
}

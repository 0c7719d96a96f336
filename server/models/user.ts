import {
  type CreationOptional,
  type InferAttributes,
  type InferCreationAttributes,
  Model,
  type Sequelize,
} from "sequelize";
import type { Role } from "../lib/policy";
import * as column from "./columns";

/** A sign-in. `issuer` and `subject` are bound at its first use. */
export class User extends Model<InferAttributes<User>, InferCreationAttributes<User>> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare name: string;
  declare email: CreationOptional<string | null>;
  declare issuer: CreationOptional<string | null>;
  declare subject: CreationOptional<string | null>;
  declare expectedSubject: CreationOptional<string | null>;
  declare workerId: CreationOptional<string | null>;
  declare language: string;
  declare sessionEpoch: CreationOptional<number>;
  declare revokedAt: CreationOptional<Date | null>;
  declare lastSignInAt: CreationOptional<Date | null>;
  declare revision: CreationOptional<number>;
}

/** A role held by a user at a site, or at all of them. */
export class RoleGrant extends Model<
  InferAttributes<RoleGrant>,
  InferCreationAttributes<RoleGrant>
> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare userId: string;
  /** `employer` is none of the roles: it goes with the employer whose person is let in. */
  declare role: Role | "employer";
  declare siteId: CreationOptional<string | null>;
  declare grantedBy: CreationOptional<string | null>;
  /** A visitor's: the one year that it is about. */
  declare year: CreationOptional<number | null>;
  declare employerKind: CreationOptional<"agency" | "contractor" | null>;
  declare employerName: CreationOptional<string | null>;
  /** When it ends by itself. */
  declare endsAt: CreationOptional<Date | null>;
  declare revokedAt: CreationOptional<Date | null>;
}

export function defineUserModels(sequelize: Sequelize): void {
  User.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      name: column.text(),
      email: column.textOrNull(),
      issuer: column.textOrNull(),
      subject: column.textOrNull(),
      expectedSubject: column.textOrNull(),
      workerId: column.uuidOrNull(),
      language: column.text(),
      sessionEpoch: column.revision(),
      revokedAt: column.instantOrNull(),
      lastSignInAt: column.instantOrNull(),
      revision: column.revision(),
    },
    { sequelize, tableName: "users" },
  );
  RoleGrant.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      userId: column.uuid(),
      role: column.text(),
      siteId: column.uuidOrNull(),
      grantedBy: column.uuidOrNull(),
      year: column.wholeOrNull(),
      employerKind: column.textOrNull(),
      employerName: column.textOrNull(),
      endsAt: column.instantOrNull(),
      revokedAt: column.instantOrNull(),
    },
    { sequelize, tableName: "role_grants" },
  );
}

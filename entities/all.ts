import { Audit } from "./audit";
import { Capture } from "./capture";
import { Case } from "./case";
import { Counter } from "./counter";
import { Event } from "./event";
import { FaultTag } from "./fault-tag";
import { Invitation } from "./invitation";
import { Member } from "./member";
import { Note } from "./note";
import { Profile } from "./profile";
import { ProfileVersion } from "./profile-version";
import { Reset } from "./reset";
import { Roster } from "./roster";
import { Session } from "./session";
import { Share } from "./share";
import { Tag } from "./tag";
import { Team } from "./team";
import { Throttle } from "./throttle";
import { Upload } from "./upload";
import { User } from "./user";

/** Every table of the product. A new entity is added here, then `npm run db:new` writes its migration. */
export const entities = [
  Team,
  User,
  Member,
  Session,
  Invitation,
  Reset,
  Throttle,
  Audit,
  Counter,
  Case,
  Capture,
  Upload,
  Note,
  FaultTag,
  Tag,
  Share,
  Roster,
  Profile,
  ProfileVersion,
  Event,
];

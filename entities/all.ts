import { Audit } from "./audit";
import { Invitation } from "./invitation";
import { Member } from "./member";
import { Reset } from "./reset";
import { Session } from "./session";
import { Team } from "./team";
import { Throttle } from "./throttle";
import { User } from "./user";

/** Every table of the product. A new entity is added here, then `npm run db:new` writes its migration. */
export const entities = [Team, User, Member, Session, Invitation, Reset, Throttle, Audit];

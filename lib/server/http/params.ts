import "server-only";
import { z } from "zod";

/** Path parameters of the routes; whatever does not fit is a page that does not exist. */
export const caseParams = z.object({ number: z.coerce.number().int().min(1).max(2_147_483_647) });
export const caseChildParams = caseParams.extend({ id: z.uuid() });
export const idParams = z.object({ id: z.uuid() });
export const secretParams = z.object({ secret: z.string().max(100) });
export const secretCaptureParams = secretParams.extend({ id: z.uuid() });

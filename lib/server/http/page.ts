import "server-only";
import { notFound } from "next/navigation";
import { Refusal } from "./problem";

/** A page's read: what the filter leaves out is the 404 page, with its status. */
export async function orNotFound<T>(reading: Promise<T>): Promise<T> {
  try {
    return await reading;
  } catch (error) {
    if (error instanceof Refusal && error.code === "not-found") notFound();
    throw error;
  }
}

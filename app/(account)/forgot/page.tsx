import type { Metadata } from "next";
import Link from "next/link";
import { ForgotForm } from "@/components/account/ForgotForm";
import { Sheet } from "@/components/account/Sheet";

export const metadata: Metadata = { title: "New password" };

export default function ForgotPage() {
  return (
    <Sheet
      title="A new password"
      lede="Enter the address of your account; we mail a link that lets you choose a new password."
      ways={<Link href="/sign-in">Back to sign-in</Link>}
    >
      <ForgotForm />
    </Sheet>
  );
}

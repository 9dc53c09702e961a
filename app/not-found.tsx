import Link from "next/link";
import { Header } from "@/components/header/Header";

export default function NotFound() {
  return (
    <>
      <Header />
      <main className="mx-auto max-w-[90rem] px-4 py-10 sm:px-10">
        <h1 className="font-serif text-head">There is nothing at this address</h1>
        <p className="mt-3 max-w-[62ch] font-serif text-lede">
          It may never have been there, or it is not yours to see. If somebody sent you this link, it has ended or was taken back:
          ask whoever sent it for a new one.
        </p>
        <p className="mt-6 flex gap-6 font-sans text-label">
          <Link href="/cases">Your team&rsquo;s cases</Link>
          <Link href="/">Read a capture without an account</Link>
        </p>
      </main>
    </>
  );
}

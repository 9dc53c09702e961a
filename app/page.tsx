import { Header } from "@/components/header/Header";

export default function FrontDoor() {
  return (
    <>
      <Header />
      <main className="mx-auto max-w-[90rem] px-4 py-8 sm:px-10">
        <h1 className="text-head">A capture of a two-wire bus, read and proved</h1>
      </main>
    </>
  );
}

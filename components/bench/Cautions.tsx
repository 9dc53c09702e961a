/** Short, where a capture is taken in and in every brief; nowhere else. */
export function Cautions() {
  return (
    <div className="max-w-[68ch] font-serif text-body text-quiet">
      <p>
        Probing a live circuit can hurt people and destroy instruments: the ground clip of most bench instruments is tied to
        protective earth. Use isolated or differential probes on anything not known to be isolated, follow local codes, and leave
        mains-connected, medical, automotive and other safety-related equipment to qualified people.
      </p>
      <p className="mt-1.5">
        A clean capture proves only what was captured. A verdict here is engineering evidence, not a certificate of conformity.
      </p>
    </div>
  );
}

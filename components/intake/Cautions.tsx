/** The usual cautions, where somebody is about to work with a probe or to rely on a verdict. Short, and only here and in a brief. */
export function Cautions() {
  return (
    <aside aria-label="Cautions" className="border-t border-hairline pt-3 font-serif text-body text-quiet">
      <p>
        Probing a live circuit can hurt people and destroy instruments: on most bench instruments the ground clip is tied to
        protective earth. Use isolated or differential probes on anything not known to be isolated, follow local codes, and leave
        mains-connected, medical, automotive and other safety-related equipment to qualified people.
      </p>
      <p className="mt-2">
        A clean capture proves only what was captured. A verdict here is engineering evidence, not a certificate of conformity.
      </p>
    </aside>
  );
}

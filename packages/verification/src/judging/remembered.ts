/**
 * A function of an object that is worked out once for each: in every fold of a cross-validation the same gauges
 * are judged, beside fewer others. What is remembered goes with the object.
 */
export function rememberedBy<K extends object, V>(make: (key: K) => V): (key: K) => V {
  const known = new WeakMap<K, { readonly value: V }>();
  return (key) => {
    const found = known.get(key) ?? { value: make(key) };
    known.set(key, found);
    return found.value;
  };
}

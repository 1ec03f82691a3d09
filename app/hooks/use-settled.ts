import { useEffect, useState } from "react";

/** The value once it has not changed for `wait` milliseconds: for what is too heavy to follow a moving thumb. */
export function useSettled<Value>(value: Value, wait: number): Value {
  const [settled, setSettled] = useState(value);
  useEffect(() => {
    if (Object.is(settled, value)) return;
    const timer = setTimeout(() => setSettled(value), wait);
    return () => clearTimeout(timer);
  }, [value, settled, wait]);
  return settled;
}

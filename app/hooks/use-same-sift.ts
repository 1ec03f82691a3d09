import { useEffect } from "react";
import { useNavigation, useRevalidator } from "react-router";
import type { SiftView } from "~/lib/views";

/**
 * Whether what a section fetched belongs to the sift that the workbench shows. Page and section are read side by side,
 * and the page is kept from section to section: a sift that ends between the two reads, or one that somebody else asked
 * for since, leaves them apart. Both are fetched again then, until they agree.
 *
 * @param shown the workbench's sift
 * @param siftId the finished sift that the section was made of; null where it found none
 * @returns true also while there is no result to show
 */
export function useSameSift(shown: SiftView | null, siftId: string | null): boolean {
  const { revalidate, state } = useRevalidator();
  const navigation = useNavigation();
  const same = shown === null || shown.result === null || shown.id === siftId;
  // Asked for in the middle of a navigation it would be lost in it.
  const idle = state === "idle" && navigation.state === "idle";
  useEffect(() => {
    if (!same && idle) void revalidate();
  }, [same, idle, revalidate]);
  return same;
}

import { useBlocker } from "react-router";
import { Button } from "~/components/ui/button";
import { Dialog, DialogFoot } from "~/components/ui/dialog";

/**
 * Asks before a page is left whose uploads would stop. The browser's own question stands guard over closing the window.
 *
 * @param props.mayLeave true for a move that the page makes itself
 */
export function LeaveGuard({ underWay, mayLeave }: { underWay: boolean; mayLeave: () => boolean }) {
  const blocker = useBlocker(
    ({ currentLocation, nextLocation }) =>
      underWay && !mayLeave() && currentLocation.pathname !== nextLocation.pathname,
  );
  const blocked = blocker.state === "blocked";
  return (
    <Dialog
      open={blocked}
      onOpenChange={(open) => !open && blocked && blocker.reset()}
      title="Files are still on their way"
      description="Leaving this page stops them. Of a file that has not arrived whole, nothing is kept."
    >
      <DialogFoot>
        <Button kind="primary" onClick={() => blocked && blocker.reset()}>
          Stay here
        </Button>
        <Button kind="stop" onClick={() => blocked && blocker.proceed()}>
          Leave and stop them
        </Button>
      </DialogFoot>
    </Dialog>
  );
}

import { useEffect, useRef } from "react";
import { useFetcher } from "react-router";
import { SubmitButton } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";

/** A remark under one's own name; it cannot be edited afterwards. */
export function RemarkForm() {
  const fetcher = useFetcher<{ ok?: true; message?: string }>();
  const form = useRef<HTMLFormElement>(null);
  const { data, state } = fetcher;
  useEffect(() => {
    if (state === "idle" && data?.ok) form.current?.reset();
  }, [state, data]);
  return (
    <fetcher.Form ref={form} method="post" className="mt-3 flex items-start gap-2 print:hidden">
      <TextField
        label="Remark"
        hideLabel
        name="text"
        required
        maxLength={2000}
        autoComplete="off"
        placeholder="Write a remark, under your name"
        error={data?.message}
        className="flex-1"
      />
      <SubmitButton kind="plain" pending={state !== "idle"}>
        Add remark
      </SubmitButton>
    </fetcher.Form>
  );
}

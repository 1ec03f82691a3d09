import type { ReactNode } from "react";
import { href } from "react-router";
import { ButtonLink } from "~/components/ui/button";
import { ExampleFigures, type ExampleView, ExampleView3D, useLiveExample } from "./example";
import { Steps } from "./steps";

export interface HomeData {
  example: ExampleView | null;
  signedIn: boolean;
  openSignUp: boolean;
}

/** What it is, with a live example that anybody may turn, warm and cool. */
export function HomePage({ data }: { data: HomeData }) {
  return (
    <div className="mx-auto w-full max-w-[82rem] px-4 pb-16 sm:px-6 xl:px-8">
      {data.example ? (
        <WithExample data={data} example={data.example} />
      ) : (
        <Hero data={data} example={null} />
      )}
      <Steps />
    </div>
  );
}

function WithExample({ data, example }: { data: HomeData; example: ExampleView }) {
  const live = useLiveExample(example);
  return (
    <>
      <Hero data={data} example={example}>
        <div className="noscript:hidden">
          <ExampleView3D live={live} />
        </div>
      </Hero>
      <ExampleFigures live={live} />
    </>
  );
}

function Hero({
  data,
  example,
  children,
}: {
  data: HomeData;
  example: ExampleView | null;
  children?: ReactNode;
}) {
  return (
    <div className="grid items-start gap-x-16 gap-y-6 pt-6 sm:pt-12 lg:grid-cols-[minmax(0,5fr)_minmax(0,6fr)]">
      <div className="lg:pt-8">
        <h1 className="text-2xl font-semibold tracking-title text-balance sm:text-3xl">
          Which conformers matter, and how sure are we?
        </h1>
        <p className="mt-4 text-base text-pretty text-ink-2 sm:text-lg">
          Lowlying takes the structures a sampler leaves behind and turns them into an ensemble you can
          defend: every frame accounted for, duplicates explained, populations with error bars, averages an
          experiment can be held against.
        </p>
        <div className="mt-6 flex flex-wrap gap-2 max-sm:[&>*]:flex-1">
          {example ? (
            <ButtonLink kind="primary" to={href("/ensembles/:id", { id: example.ensemble.id })}>
              Open this example
            </ButtonLink>
          ) : null}
          {data.signedIn ? (
            <ButtonLink to={href("/teams")}>Your teams</ButtonLink>
          ) : (
            <>
              <ButtonLink to={href("/login")}>Sign in</ButtonLink>
              {data.openSignUp ? (
                <ButtonLink kind="quiet" to={href("/sign-up")}>
                  Sign up
                </ButtonLink>
              ) : null}
            </>
          )}
        </div>
        <p className="mt-3 text-xs text-ink-3">
          {example ? "No account needed for the example. " : ""}
          {data.openSignUp || data.signedIn ? "" : "Sign-up is by invitation."}
        </p>
      </div>
      <div className="min-w-0">{children}</div>
    </div>
  );
}

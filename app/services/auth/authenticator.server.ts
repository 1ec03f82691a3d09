import { Authenticator } from "remix-auth";
import { FormStrategy } from "remix-auth-form";
import { type Caller, signIn } from "./sign-in.server.ts";

const field = (form: FormData, name: string) => {
  const value = form.get(name);
  return typeof value === "string" ? value : "";
};

/** Signs in by the form of the sign-in page: `email`, `password` and, when ticked, `stay`. */
export function formAuthenticator(caller: Caller) {
  const authenticator = new Authenticator<{ userId: string; secret: string; stay: boolean }>();
  authenticator.use(
    new FormStrategy(async ({ form }) => {
      const stay = field(form, "stay") !== "";
      const options = { email: field(form, "email"), password: field(form, "password"), stay, caller };
      return { ...(await signIn(options)), stay };
    }),
    "form",
  );
  return authenticator;
}

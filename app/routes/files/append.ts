// The same call as the API's, for whoever is signed in.
export { action, loader } from "~/routes/api/files";

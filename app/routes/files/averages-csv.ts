// The same call as the API's, for whoever is signed in or looks at the example.
export { action, loader } from "~/routes/api/averages-csv";

import type { Config } from "@react-router/dev/config";

export default {
  // Tests build into a folder of their own, so that a server that runs keeps its files.
  buildDirectory: process.env.BUILD_DIRECTORY || "build",
  ssr: true,
  routeDiscovery: { mode: "initial" },
  // The root middleware checks the origin itself, against APP_ORIGIN and for resource routes too;
  // the framework's own check answers before any middleware and without our headers.
  allowedActionOrigins: ["**"],
  future: {
    v8_middleware: true,
    v8_splitRouteModules: true,
    v8_viteEnvironmentApi: true,
    v8_passThroughRequests: true,
    v8_trailingSlashAwareDataRequests: true,
  },
} satisfies Config;

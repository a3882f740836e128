// Written by api/clients/generate; not edited by hand.
export const contractVersion = "1.0.0";

export const routes = {
  sizing: { method: "POST", path: "/v1/sizing" },
  steadyState: { method: "POST", path: "/v1/steady-state" },
  losses: { method: "POST", path: "/v1/losses" },
  corners: { method: "POST", path: "/v1/corners" },
  loopGain: { method: "POST", path: "/v1/loop-gain" },
  transients: { method: "POST", path: "/v1/transients" },
  ruleChecks: { method: "POST", path: "/v1/rule-checks" },
  substitutions: { method: "POST", path: "/v1/substitutions" },
  bomChecks: { method: "POST", path: "/v1/bom-checks" },
  reports: { method: "POST", path: "/v1/reports" },
  listQuantities: { method: "GET", path: "/v1/quantities" },
  listPreferredValues: { method: "GET", path: "/v1/preferred-values" },
  listRulePacks: { method: "GET", path: "/v1/rule-packs" },
  getRulePack: { method: "GET", path: "/v1/rule-packs/{id}" },
  listJobs: { method: "GET", path: "/v1/jobs" },
  getJob: { method: "GET", path: "/v1/jobs/{id}" },
  cancelJob: { method: "DELETE", path: "/v1/jobs/{id}" },
  getJobEvents: { method: "GET", path: "/v1/jobs/{id}/events" },
  getResult: { method: "GET", path: "/v1/results/{id}" },
} as const;

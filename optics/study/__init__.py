"""Many stacks at once: sweeps, comparisons, tolerances, the audit, and the engine that spreads their work."""

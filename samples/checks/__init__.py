"""Is this number real? One small pure function a check; ``samples.checks.battery`` runs them all."""

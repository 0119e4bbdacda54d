"""Who must know: rules, alerts, deliveries and mail."""

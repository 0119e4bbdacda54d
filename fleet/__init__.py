"""What holds oil and what it needs: places, machines, reservoirs, fluids, filters, events, targets, limits, standing."""

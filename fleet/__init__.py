"""What holds oil and what it needs: places, reservoirs, fluids, filters, events, targets, limits, standing."""

"""Fire weather at the sites of a crossing: dryness, fuel moisture, indices, thresholds, the night."""

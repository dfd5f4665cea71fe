"""Many crossings: how sure an answer is, hours, bearings, the lee as a map."""

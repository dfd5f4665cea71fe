"""The report: page data from a crossing, figures as SVG, one HTML file. Computes no weather."""

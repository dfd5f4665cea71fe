"""Rain over the map: linear theory, windward and lee shares, rain or snow, catchments, gauges. Opens no file."""

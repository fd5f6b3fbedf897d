"""Closed forms, series and published correlations; plain numbers and arrays, never the solver."""

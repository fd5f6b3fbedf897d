"""One case on one grid: properties, boundary values, flow and energy steps, and the loop that joins them."""

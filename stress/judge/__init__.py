"""Results, limits and policies to findings, risk order and explanation."""

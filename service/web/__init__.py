"""HTTP only: routes, bodies, problem documents. What is computed, and how it is worded, is decided below."""

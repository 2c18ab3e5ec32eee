"""Equations put in an order, and solved. Knows names, incidence and residuals, and no thermodynamics."""

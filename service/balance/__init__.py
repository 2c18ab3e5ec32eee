"""The first law: what a case is, and the balances and relations that it gives rise to."""

"""How far an answer can be trusted: the second law, and the uncertainty that the readings bring."""

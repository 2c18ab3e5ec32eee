"""Between JSON and the domain: shapes, quantities, places, and the wording of answers and errors."""

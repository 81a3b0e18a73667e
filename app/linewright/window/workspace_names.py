"""Names of the tables in the order of their tabs."""

TABLES = ("ledger", "rollcall", "catalogue", "orphans", "changes")

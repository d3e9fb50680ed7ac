"""The stock database: records go in, records come out, and nothing of SQL leaves this room."""

"""Drawing to solver rows to results by id. Knows no Qt."""

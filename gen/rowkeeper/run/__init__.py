"""The whole line on one page: reads, plans, generates, judges, fits, writes."""

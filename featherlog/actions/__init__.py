"""One function for each thing a person does: checks, one transaction, a result."""

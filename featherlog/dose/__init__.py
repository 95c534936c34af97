"""The dose that matched edges add up to along the junction axis, and its figures of merit."""

"""What targets cost: many questions to the search at once, fronts, and targets in conflict."""

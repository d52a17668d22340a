"""From field strength to a decision. Read planner.py first: it is the way of one request."""

"""Pictures and pages, made from run folders only."""

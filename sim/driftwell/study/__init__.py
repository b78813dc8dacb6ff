"""Many runs for one purpose: what a study file says, which runs it means, what they answered."""

"""The search for briefs with several jumps: variables, their groups, the separated scan, and the study."""

"""Gas models: constant gamma, frozen composition, equilibrium, behind the same verbs."""

"""The rate form of a transient: vessels, what joins them, and their integration in time.

reading     the case as numbers: which are given, which one is sought
vessels     what a boundary holds: its state from mass and energy, its wall
throat      the mass flux of a restriction, cheap enough for an integration
crossings   streams and transfers: what they carry at a moment
plant       all of it together: the rates of change of everything that is integrated
path        the solution as pieces of polynomials in time
integrate   the steps in time, with the time budget and the events that end them
events      what is watched for on the way
history     columns over time, extremes
shooting    an unknown constant, found so that a target is met
entropy     the second law over the period
telling     the Solution
"""

"""stub"""
def branch(core, relaxation, bounds, most, monitor):
    print("BRANCH needed", core.n, bounds.lower, bounds.upper)

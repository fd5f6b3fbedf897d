def presence(tree, source):
    return []
def contradictions(case, source):
    return []

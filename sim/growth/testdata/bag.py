# Seconds that igraph's C core takes for plain preferential attachment (its "bag", which has no fitness), 2 links a newcomer.
import sys, time
import igraph

for n in sys.argv[1:]:
    begun = time.perf_counter()
    igraph.Graph.Barabasi(int(n), 2, implementation="bag")
    print(f"{time.perf_counter() - begun:.6f}")

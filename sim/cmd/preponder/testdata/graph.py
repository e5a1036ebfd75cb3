# Reads what the command wrote with two general-purpose graph libraries and the csv module, and prints what they find.
import csv, json, sys
import igraph, networkx

graphml, log, degrees = sys.argv[1:4]
g = networkx.read_graphml(graphml, force_multigraph=True)
h = igraph.Graph.Read_GraphML(graphml)
links = list(csv.DictReader(open(log, newline="")))
table = list(csv.DictReader(open(degrees, newline="")))
inward = {}
for r in links:
    inward[r["target"]] = inward.get(r["target"], 0) + 1
labels = networkx.get_node_attributes(g, "label")
json.dump({
    "networkx": [g.number_of_nodes(), g.number_of_edges(), g.is_directed()],
    "igraph": [h.vcount(), h.ecount(), h.is_directed()],
    "csv": [len(table), len(links)],
    "degrees agree": all(int(r["links"]) == inward.get(r["member"], 0) for r in table)
    and all(g.in_degree(n) == inward.get(labels[n], 0) for n in g)
    and [h.vs[i]["links"] for i in range(h.vcount())] == [float(d) for d in h.indegree()],
    "edges agree": sorted((labels[a], labels[b]) for a, b, _ in g.edges(keys=True)) == sorted((r["source"], r["target"]) for r in links),
    "energies agree": all(abs(float(r["energy"]) - h.vs[i]["energy"]) < 1e-12 for i, r in enumerate(table)),
}, sys.stdout)

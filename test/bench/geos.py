"""The nearest edge and the zone of the first points with Debian's shapely: seconds for the trees, then for each point.
Arguments: folder of points.bin, edges.bin and zones.bin, number of points."""
import sys
import time
from array import array

from shapely.geometry import LineString, Point, Polygon
from shapely.prepared import prep
from shapely.strtree import STRtree


def numbers_of(name):
    values = array("d")
    with open(f"{sys.argv[1]}/{name}", "rb") as file:
        values.frombytes(file.read())
    return values


points, edges, rings = numbers_of("points.bin"), numbers_of("edges.bin"), numbers_of("zones.bin")
count = int(sys.argv[2])
started = time.perf_counter()
lines = [LineString([(edges[k], edges[k + 1]), (edges[k + 2], edges[k + 3])]) for k in range(0, len(edges), 4)]
edge_tree = STRtree(lines)
zones, at = [], 0
while at < len(rings):
    size = int(rings[at])
    zones.append(Polygon([(rings[at + 1 + 2 * k], rings[at + 2 + 2 * k]) for k in range(size)]))
    at += 1 + 2 * size
zone_tree = STRtree(zones)
prepared = {id(zone): prep(zone) for zone in zones}
edge_tree.nearest(Point(points[0], points[1]))
zone_tree.query(Point(points[0], points[1]))
built = time.perf_counter()
for i in range(count):
    point = Point(points[2 * i], points[2 * i + 1])
    edge_tree.nearest(point)
    any(prepared[id(zone)].contains(point) for zone in zone_tree.query(point))
print(f"{built - started:.3f} {(time.perf_counter() - built) / count:.9f}")

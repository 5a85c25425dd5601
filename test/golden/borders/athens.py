"""
Districts and flats of Athens by GEOS and PROJ in the Greek grid (EPSG:2100), for test/borders/fabricAthens.test.ts.
Debian 12: python3-shapely 1.8.5 (GEOS 3.11.1), python3-pyproj 3.4.1 (PROJ 9.1.1). Run in this folder:
    /usr/bin/python3 athens.py > athens.json

Edges are straight in longitude and latitude (RFC 7946), so they are cut to at most 20 m before they are projected.
Districts that touch do so within a millimetre. A border is the part of one boundary within 5 cm of another: a wider
buffer would add as much of the coast at each end.
"""
import csv
import json
import math

from pyproj import Geod, Transformer
from shapely.geometry import Point, Polygon, shape
from shapely.ops import transform, unary_union

near = 0.05
folder = "../../fixtures/athens-flats/"
to_grid = Transformer.from_crs("EPSG:4326", "EPSG:2100", always_xy=True).transform
geod = Geod(ellps="WGS84")


def cut(ring):
    points = []
    for (x0, y0), (x1, y1) in zip(ring, ring[1:]):
        parts = max(1, math.ceil(math.hypot((x1 - x0) * 88000, (y1 - y0) * 111000) / 20))
        points += [(x0 + k * (x1 - x0) / parts, y0 + k * (y1 - y0) / parts) for k in range(parts)]
    return points + [ring[-1]]


with open(folder + "districts.geojson") as file:
    features = json.load(file)["features"]
names = [feature["properties"]["district"] for feature in features]
written = [shape(feature["geometry"]) for feature in features]
fine = [Polygon(cut(list(zone.exterior.coords)), [cut(list(hole.coords)) for hole in zone.interiors]) for zone in written]
grid = [transform(to_grid, zone) for zone in fine]
count = len(names)

pairs = []
for a in range(count):
    for b in range(count):
        if a == b or grid[a].distance(grid[b]) > near:
            continue
        shared = grid[a].boundary.intersection(grid[b].boundary.buffer(near, resolution=64))
        pairs.append({"zones": [names[a], names[b]], "metres": shared.length,
                      "overlap": grid[a].intersection(grid[b]).area if a < b else None})

holes = []
for hole in unary_union(grid).interiors:
    gap = Polygon(hole)
    touching = sorted(names[k] for k in range(count) if grid[k].distance(gap) < 1e-6)
    holes.append({"zones": touching, "area": gap.area})

# metres to the boundary of every district, and the district that holds the flat
flats = []
with open(folder + "flats.csv") as file:
    for row in csv.DictReader(file):
        point = Point(*to_grid(float(row["lon"]), float(row["lat"])))
        holding = [names[k] for k in range(count) if grid[k].contains(point)]
        flats.append({"id": row["id"], "in": holding,
                      "to": [round(grid[k].boundary.distance(point), 6) for k in range(count)]})

# metres to the part of district 1's boundary within 5 cm of another district's
others = unary_union([grid[k].boundary for k in range(count) if names[k] != "1"])
border = grid[names.index("1")].boundary.intersection(others.buffer(near, resolution=64))
with open(folder + "flats.csv") as file:
    for row, flat in zip(csv.DictReader(file), flats):
        point = Point(*to_grid(float(row["lon"]), float(row["lat"])))
        flat["border"] = round(border.distance(point), 6)

def rows(name, items):
    return ' "%s": [\n  %s\n ]' % (name, ",\n  ".join(json.dumps(item) for item in items))


districts = [{"name": names[k], "gridArea": grid[k].area, "geodesicArea": abs(geod.geometry_area_perimeter(fine[k])[0]),
              "geodesicLength": geod.geometry_area_perimeter(fine[k])[1]} for k in range(count)]
parts = [rows("districts", districts), rows("pairs", pairs), rows("holes", holes),
         ' "borderOf1": %r' % border.length, rows("flats", flats)]
print("{\n" + ",\n".join(parts) + "\n}")

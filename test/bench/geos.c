/*
 * The nearest edge and the zone of every point with GEOS, in planar degrees: what scarp's placing is timed beside.
 * Reads points.bin, edges.bin and zones.bin of the folder given; prints seconds and sums of the answers.
 * The few declarations of the C interface stand here, so that the library is enough, without its headers.
 */
#include <stdio.h>
#include <stdlib.h>

typedef struct Geometry Geometry;
typedef struct Prepared Prepared;
typedef struct Sequence Sequence;
typedef struct Tree Tree;
extern void initGEOS(void (*notice)(const char *, ...), void (*error)(const char *, ...));
extern Sequence *GEOSCoordSeq_copyFromBuffer(const double *, unsigned int, int, int);
extern Geometry *GEOSGeom_createLineString(Sequence *);
extern Geometry *GEOSGeom_createLinearRing(Sequence *);
extern Geometry *GEOSGeom_createPolygon(Geometry *, Geometry **, unsigned int);
extern Geometry *GEOSGeom_createPointFromXY(double, double);
extern void GEOSGeom_setUserData(Geometry *, void *);
extern void *GEOSGeom_getUserData(const Geometry *);
extern void GEOSGeom_destroy(Geometry *);
extern const Prepared *GEOSPrepare(const Geometry *);
extern char GEOSPreparedContains(const Prepared *, const Geometry *);
extern Tree *GEOSSTRtree_create(size_t);
extern void GEOSSTRtree_insert(Tree *, const Geometry *, void *);
extern void GEOSSTRtree_query(Tree *, const Geometry *, void (*)(void *, void *), void *);
extern const Geometry *GEOSSTRtree_nearest(Tree *, const Geometry *);

static void say(const char *text, ...) { fprintf(stderr, "%s\n", text); }

static double *numbersOf(const char *folder, const char *name, size_t *count) {
  char path[4096];
  snprintf(path, sizeof path, "%s/%s", folder, name);
  FILE *file = fopen(path, "rb");
  if (!file) { perror(path); exit(1); }
  fseek(file, 0, SEEK_END);
  *count = (size_t)ftell(file) / sizeof(double);
  rewind(file);
  double *numbers = malloc(*count * sizeof(double));
  if (fread(numbers, sizeof(double), *count, file) != *count) exit(1);
  fclose(file);
  return numbers;
}

static const Prepared **zones;
struct Search { const Geometry *point; long zone; };

static void visit(void *item, void *data) {
  struct Search *search = data;
  if (GEOSPreparedContains(zones[(long)item], search->point) == 1) search->zone = (long)item;
}

int main(int argc, char **argv) {
  if (argc != 2) return 2;
  initGEOS(say, say);
  size_t pointNumbers, edgeNumbers, zoneNumbers;
  double *points = numbersOf(argv[1], "points.bin", &pointNumbers);
  double *edges = numbersOf(argv[1], "edges.bin", &edgeNumbers);
  double *rings = numbersOf(argv[1], "zones.bin", &zoneNumbers);
  Tree *edgeTree = GEOSSTRtree_create(10);
  for (size_t e = 0; e < edgeNumbers / 4; e++) {
    Geometry *line = GEOSGeom_createLineString(GEOSCoordSeq_copyFromBuffer(edges + 4 * e, 2, 0, 0));
    GEOSGeom_setUserData(line, (void *)e);
    GEOSSTRtree_insert(edgeTree, line, line);
  }
  Tree *zoneTree = GEOSSTRtree_create(10);
  zones = malloc(zoneNumbers * sizeof *zones);
  long zone = 0;
  for (size_t at = 0; at < zoneNumbers; zone++) {
    unsigned int positions = (unsigned int)rings[at];
    Geometry *ring = GEOSGeom_createLinearRing(GEOSCoordSeq_copyFromBuffer(rings + at + 1, positions, 0, 0));
    Geometry *polygon = GEOSGeom_createPolygon(ring, NULL, 0);
    zones[zone] = GEOSPrepare(polygon);
    GEOSSTRtree_insert(zoneTree, polygon, (void *)zone);
    at += 1 + 2 * positions;
  }
  double edgeSum = 0;
  long inZones = 0;
  for (size_t i = 0; i < pointNumbers; i += 2) {
    Geometry *point = GEOSGeom_createPointFromXY(points[i], points[i + 1]);
    edgeSum += (double)(long)GEOSGeom_getUserData(GEOSSTRtree_nearest(edgeTree, point));
    struct Search search = {point, -1};
    GEOSSTRtree_query(zoneTree, point, visit, &search);
    if (search.zone >= 0) inZones++;
    GEOSGeom_destroy(point);
  }
  printf("%ld %.0f\n", inZones, edgeSum);
  return 0;
}

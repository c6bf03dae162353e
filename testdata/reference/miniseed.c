/* Writes miniseed.json: what libmseed 2 reads in miniSEED 2.4, and records that
 * it packs itself. Made with libmseed 2.19.8 of Debian 12 (libmseed-dev):
 *
 *     cc -O1 miniseed.c -lmseed -o miniseed
 *     ./miniseed ../records/miniseed/three-channels.mseed ../records/miniseed/floats.mseed \
 *         ../records/miniseed/velocity.mseed > miniseed.json
 *
 * "read" lists the records of the files as they come: name, byte at which they
 * begin, codes, start in microseconds since 1970, rate and samples. "packed" are
 * records of an invented series, as hexadecimal digits, with the samples that
 * went in.
 */
#include <libmseed.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>

static void sample(const MSRecord *r, int64_t i) {
  switch (r->sampletype) {
  case 'i': printf("%d", ((int32_t *)r->datasamples)[i]); break;
  case 'f': printf("%.17g", (double)((float *)r->datasamples)[i]); break;
  case 'd': printf("%.17g", ((double *)r->datasamples)[i]); break;
  }
}

static void samples(const MSRecord *r) {
  printf("\"samples\": [");
  for (int64_t i = 0; i < r->numsamples; i++) {
    if (i) printf(",");
    sample(r, i);
  }
  printf("]");
}

static const char *comma = "";

static int read_file(char *path) {
  MSRecord *r = NULL;
  off_t at = 0;
  int last = 0, rc;
  const char *base = strrchr(path, '/') ? strrchr(path, '/') + 1 : path;
  while ((rc = ms_readmsr(&r, path, 0, &at, &last, 1, 1, 0)) == MS_NOERROR) {
    printf("%s\n    {\"file\": \"%s\", \"offset\": %lld, \"id\": \"%s.%s.%s.%s\", \"start_us\": %lld, \"rate\": %.17g, ", comma, base,
           (long long)at, r->network, r->station, r->location, r->channel, (long long)r->starttime, r->samprate);
    samples(r);
    printf("}");
    comma = ",";
  }
  ms_readmsr(&r, NULL, 0, NULL, NULL, 0, 0, 0);
  return rc == MS_ENDOFFILE ? 0 : 1;
}

static void hex(char *record, int length, void *unused) {
  (void)unused;
  printf("%s\"", comma);
  for (int i = 0; i < length; i++) printf("%02x", (unsigned char)record[i]);
  printf("\"");
  comma = ", ";
}

enum { COUNT = 600 };

/* pack writes one series in one encoding and byte order. Differences of all
 * sizes occur, up to the limit. */
static int pack(int encoding, char type, int big, double limit) {
  static int32_t ints[COUNT];
  static float floats[COUNT];
  static double doubles[COUNT];
  uint64_t seed = 88172645463325252ULL + encoding;
  double x = 0;
  for (int i = 0; i < COUNT; i++) {
    seed ^= seed << 13, seed ^= seed >> 7, seed ^= seed << 17;
    double step = ((double)(seed >> 11) / 4503599627370496.0 - 1) * limit / (1 << (i / 30 % 20));
    if (x + step > 8 * limit || x + step < -8 * limit) step = -step;
    x += step;
    ints[i] = (int32_t)x, floats[i] = (float)(x / 7), doubles[i] = x / 7;
  }
  MSRecord *r = msr_init(NULL);
  strcpy(r->network, "XX"), strcpy(r->station, "TARN"), strcpy(r->location, "00"), strcpy(r->channel, "HNE");
  r->dataquality = 'D', r->starttime = ms_seedtimestr2hptime("2041,063,08:12:09.500037"), r->samprate = 200;
  r->reclen = 512, r->encoding = encoding, r->byteorder = big, r->sampletype = type;
  r->datasamples = type == 'i' ? (void *)ints : type == 'f' ? (void *)floats : (void *)doubles;
  r->numsamples = COUNT;
  int64_t packed = 0;
  printf("%s\n    {\"encoding\": %d, \"big_endian\": %s, ", comma, encoding, big ? "true" : "false");
  samples(r);
  printf(", \"records\": [");
  comma = "";
  msr_pack(r, hex, NULL, &packed, 1, 0);
  printf("]}");
  comma = ",";
  r->datasamples = NULL;
  msr_free(&r);
  return packed == COUNT ? 0 : 1;
}

int main(int argc, char **argv) {
  int bad = 0;
  printf("{\"library\": \"libmseed %s\",\n  \"read\": [", LIBMSEED_VERSION);
  for (int i = 1; i < argc; i++) bad |= read_file(argv[i]);
  printf("],\n  \"packed\": [");
  comma = "";
  for (int big = 0; big < 2; big++) {
    bad |= pack(1, 'i', big, 3000);
    bad |= pack(3, 'i', big, 200000000);
    bad |= pack(4, 'f', big, 1e6);
    bad |= pack(5, 'd', big, 1e6);
    bad |= pack(10, 'i', big, 200000000);
    bad |= pack(11, 'i', big, 60000000);
  }
  printf("]}\n");
  return bad;
}

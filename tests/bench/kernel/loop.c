/*
 * The arithmetic of the kernel as a plain C loop: sections, controllers, figures, one upset at a time.
 * usage: loop FILE REPEATS; prints the processor time in s, then the figures of each upset and loop.
 * FILE holds doubles in the order in which they are taken below.
 */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

typedef struct {
  double kp, ki, kd, derivative_decay, filter_decay, second_filter, setpoint_weight, derivative_weight;
  double low, high, reach;
  double band, own_setpoint;
  double filtered1, filtered2, derivative_input, derivative, integral, output, saturation;
  double sum_error, sum_timed_error, peak_error, beyond, last_outside, travel, peak_move, limited;
  int measurement, source, outer, inner;
} Loop;

typedef struct {
  int loop, source;
  double size;
  double *bands;
} Upset;

static double *take;
static double number(void) { return *take++; }
static int whole(void) { return (int)*take++; }
static double *list(int n) {
  double *from = take;
  take += n;
  return from;
}
static int *wholes(int n) {
  int *out = malloc(sizeof(int) * (n + 1));
  for (int i = 0; i < n; i += 1) out[i] = whole();
  return out;
}

static double sign(double x) { return x > 0 ? 1 : x < 0 ? -1 : 0; }

static void scan(Loop *l, const Loop *inner, double setpoint, double measured) {
  double filtered = measured;
  if (l->filter_decay != 0) {
    filtered = l->filter_decay * l->filtered1 + (1 - l->filter_decay) * measured;
    l->filtered1 = filtered;
    if (l->second_filter == 1) {
      filtered = l->filter_decay * l->filtered2 + (1 - l->filter_decay) * filtered;
      l->filtered2 = filtered;
    }
  }
  double fixed = l->kp * (l->setpoint_weight * setpoint - filtered);
  if (l->kd != 0) {
    double input = l->derivative_weight * setpoint - filtered;
    l->derivative = l->derivative_decay * l->derivative + l->kd * (input - l->derivative_input);
    l->derivative_input = input;
    fixed += l->derivative;
  }
  double stuck = inner ? sign(inner->saturation * inner->kp) : 0;
  if (l->ki != 0) {
    double step = l->ki * (setpoint - filtered);
    if (step * stuck <= 0) l->integral += step;
  }
  double wanted = fixed + l->integral;
  double before = l->output;
  double low = l->low > before - l->reach ? l->low : before - l->reach;
  double high = l->high < before + l->reach ? l->high : before + l->reach;
  double delivered = wanted, saturation = 0;
  if (wanted > high) {
    delivered = high;
    saturation = 1;
  } else if (wanted < low) {
    delivered = low;
    saturation = -1;
  }
  if (saturation != 0) {
    l->limited = 1;
    if (l->ki != 0) l->integral = delivered - fixed;
  }
  l->saturation = saturation != 0 ? saturation : stuck;
  l->output = delivered;
  double move = fabs(delivered - before);
  l->travel += move;
  if (move > l->peak_move) l->peak_move = move;
}

static void count(Loop *l, int k, double setpoint, double measured, int last) {
  double error = setpoint - measured, size = fabs(error);
  if (!last) {
    l->sum_error += size;
    l->sum_timed_error += size * k;
  }
  if (size > l->peak_error) l->peak_error = size;
  if (size > l->band) l->last_outside = k + 1;
  if (l->own_setpoint != 0) {
    double beyond = -error / setpoint;
    if (beyond > l->beyond) l->beyond = beyond;
  }
}

static int loops, sources, measurements, groups, sections, upsets, steps, per_scan, lead;
static int *group_source, *group_delay, *group_measurement, *group_start, *order;
static double *decay, *now, *before_, step_;
static Loop *loop;
static Upset *upset;

static void run(const Upset *u, double *history, double *states, double *values, int *active) {
  int stride = lead + steps + 1, count_active = 0;
  memset(history, 0, sizeof(double) * sources * stride);
  memset(states, 0, sizeof(double) * sections);
  for (int i = 0; i < loops; i += 1) {
    Loop *l = &loop[i];
    memset(&l->filtered1, 0, (char *)&l->measurement - (char *)&l->filtered1);
    l->band = u->bands[i];
    l->own_setpoint = u->loop == i && u->source < 0 ? u->size : 0;
  }
  for (int g = 0; g < groups; g += 1) {
    int moved = group_source[g] == u->source;
    for (int i = 0; i < loops; i += 1) moved |= loop[i].source == group_source[g];
    if (moved) active[count_active++] = g;
  }
  int until_scan = 0;
  for (int k = 0; k <= steps; k += 1) {
    for (int m = 0; m < measurements; m += 1) values[m] = 0;
    for (int a = 0; a < count_active; a += 1) {
      int g = active[a];
      const double *u0 = history + (long)group_source[g] * stride + lead - 1 - group_delay[g] + k;
      double x0 = u0[0], x1 = u0[-1], sum = 0;
      for (int s = group_start[g]; s < group_start[g + 1]; s += 1) {
        double x = states[s] * decay[s] + now[s] * x0 + before_[s] * x1;
        states[s] = x;
        sum += x;
      }
      values[group_measurement[g]] += sum;
    }
    if (u->source >= 0) history[(long)u->source * stride + lead + k] = u->size;
    int scanning = until_scan == 0;
    until_scan = scanning ? per_scan - 1 : until_scan - 1;
    for (int o = 0; o < loops; o += 1) {
      Loop *l = &loop[order[o]];
      double setpoint = l->outer >= 0 ? loop[l->outer].output : l->own_setpoint;
      double measured = values[l->measurement];
      if (scanning) scan(l, l->inner >= 0 ? &loop[l->inner] : NULL, setpoint, measured);
      if (l->source >= 0)
        history[(long)l->source * stride + lead + k] = (l->source == u->source ? u->size : 0) + l->output;
      count(l, k, setpoint, measured, k == steps);
    }
  }
}

int main(int argc, char **argv) {
  if (argc != 3) return 2;
  FILE *file = fopen(argv[1], "rb");
  if (!file) return 2;
  fseek(file, 0, SEEK_END);
  long bytes = ftell(file);
  rewind(file);
  take = malloc(bytes);
  if (fread(take, 1, bytes, file) != (size_t)bytes) return 2;
  fclose(file);
  loops = whole(), sources = whole(), measurements = whole(), groups = whole(), sections = whole();
  upsets = whole(), steps = whole(), per_scan = whole(), lead = whole(), step_ = number();
  group_source = wholes(groups), group_delay = wholes(groups), group_measurement = wholes(groups);
  group_start = wholes(groups + 1);
  decay = list(sections), now = list(sections), before_ = list(sections);
  order = wholes(loops);
  loop = calloc(loops, sizeof(Loop));
  for (int i = 0; i < loops; i += 1) {
    memcpy(&loop[i], list(11), 11 * sizeof(double));
    loop[i].measurement = whole(), loop[i].source = whole(), loop[i].outer = whole(), loop[i].inner = whole();
  }
  upset = calloc(upsets, sizeof(Upset));
  for (int u = 0; u < upsets; u += 1) {
    upset[u].loop = whole(), upset[u].source = whole(), upset[u].size = number();
    upset[u].bands = list(loops);
  }
  double *history = malloc(sizeof(double) * sources * (lead + steps + 1));
  double *states = malloc(sizeof(double) * (sections + 1));
  double *values = malloc(sizeof(double) * measurements);
  int *active = malloc(sizeof(int) * (groups + 1));
  double *out = malloc(sizeof(double) * upsets * loops * 8);
  clock_t start = clock();
  for (int r = 0; r < atoi(argv[2]); r += 1) {
    for (int u = 0; u < upsets; u += 1) {
      run(&upset[u], history, states, values, active);
      for (int i = 0; i < loops; i += 1) {
        const Loop *l = &loop[i];
        double *f = out + (u * loops + i) * 8;
        f[0] = l->sum_error * step_, f[1] = l->sum_timed_error * step_ * step_, f[2] = l->peak_error;
        f[3] = l->beyond, f[4] = l->last_outside > steps ? INFINITY : l->last_outside * step_;
        f[5] = l->travel, f[6] = l->peak_move, f[7] = l->limited;
      }
    }
  }
  printf("%.9g\n", (double)(clock() - start) / CLOCKS_PER_SEC);
  for (int i = 0; i < upsets * loops * 8; i += 1) printf("%.17g\n", out[i]);
  return 0;
}

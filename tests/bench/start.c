/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a user waits for: the start of the tool beside that of an empty program, and the
 * whole report of a register.
 *
 *     start TOOL EMPTY REGISTER
 *
 * Each of the three runs RUNS times, in turn; their output is thrown away. Owns nothing
 * but the children for the length of a run. */
#include <fcntl.h>
#include <spawn.h>
#include <stdio.h>
#include <stdlib.h>
#include <sys/wait.h>

#include "median.h"

extern char **environ;

/* Milliseconds from before the start of a program to behind its end. */
static double run(const char *const *command)
{
    posix_spawn_file_actions_t quiet;
    pid_t child;
    int status;
    posix_spawn_file_actions_init(&quiet);
    posix_spawn_file_actions_addopen(&quiet, 1, "/dev/null", O_WRONLY, 0);
    double begin = bench_now();
    if (posix_spawn(&child, command[0], &quiet, NULL, (char *const *)command, environ) != 0 ||
        waitpid(child, &status, 0) != child || status != 0) {
        fprintf(stderr, "%s does not run\n", command[0]);
        exit(EXIT_FAILURE);
    }
    double time = bench_now() - begin;
    posix_spawn_file_actions_destroy(&quiet);
    return time;
}

int main(int argc, char **argv)
{
    double empty[RUNS], version[RUNS], report[RUNS];
    if (argc != 4) {
        fputs("usage: start TOOL EMPTY REGISTER\n", stderr);
        return EXIT_FAILURE;
    }
    const char *const nothing[] = {argv[2], NULL}, *const start[] = {argv[1], "--version", NULL},
                      *const whole[] = {argv[1], "-r", argv[3], "report", NULL};
    for (int i = 0; i < RUNS; i++) {
        empty[i] = run(nothing);
        version[i] = run(start);
        report[i] = run(whole);
    }
    double least = bench_median(empty), tool = bench_median(version);
    printf("empty program            %8.2f ms\n", least);
    printf("ohmen --version          %8.2f ms  %.2f times, %.2f ms more\n", tool, tool / least,
           tool - least);
    printf("ohmen report, the sample %8.2f ms\n", bench_median(report));
    return EXIT_SUCCESS;
}

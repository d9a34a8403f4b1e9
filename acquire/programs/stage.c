/* stage.c: stage programs are started by posix_spawn and waited for; what they say is kept, to be shown or
 * summed up.
 */
#include "acquire/programs/stage.h"

#include <errno.h>
#include <fcntl.h>
#include <limits.h>
#include <signal.h>
#include <spawn.h>
#include <stdio.h>
#include <string.h>
#include <sys/mman.h>
#include <sys/wait.h>
#include <unistd.h>

extern char **environ;

an_status an_stage_folder(char *folder, size_t n_folder, an_error *err)
{
    char path[PATH_MAX];
    ssize_t n = readlink("/proc/self/exe", path, sizeof path - 1);
    if (n < 0)
        return an_fail(err, AN_E_IO, "/proc/self/exe", "cannot be read: %s", strerror(errno));
    path[n] = '\0';
    char *slash = strrchr(path, '/');
    if (slash)
        *slash = '\0';
    if ((size_t)snprintf(folder, n_folder, "%s", path) >= n_folder)
        return an_fail(err, AN_E_IO, path, "the path is too long");
    return AN_OK;
}

/* Standard input empty, standard output nowhere, standard error into a file in memory. */
static int prepare(posix_spawn_file_actions_t *actions, int said)
{
    int failed = posix_spawn_file_actions_init(actions);
    if (failed)
        return failed;
    failed = posix_spawn_file_actions_addopen(actions, STDIN_FILENO, "/dev/null", O_RDONLY, 0);
    if (!failed)
        failed = posix_spawn_file_actions_addopen(actions, STDOUT_FILENO, "/dev/null", O_WRONLY, 0);
    if (!failed)
        failed = posix_spawn_file_actions_adddup2(actions, said, STDERR_FILENO);
    if (failed)
        posix_spawn_file_actions_destroy(actions);
    return failed;
}

static void collect(int said, an_stage_end *end)
{
    ssize_t n = pread(said, end->said, sizeof end->said - 1, 0);
    end->said[n > 0 ? n : 0] = '\0';
    size_t length = strlen(end->said);
    while (length > 0 && end->said[length - 1] == '\n')
        end->said[--length] = '\0';
}

/* Signals that end a program, but for those that whoever started it had ignored. */
static void ending_signals(sigset_t *set)
{
    static const int signals[] = {SIGHUP, SIGINT, SIGTERM};
    struct sigaction now;
    sigemptyset(set);
    for (size_t i = 0; i < sizeof signals / sizeof signals[0]; i++)
        if (sigaction(signals[i], NULL, &now) == 0 && now.sa_handler != SIG_IGN)
            sigaddset(set, signals[i]);
}

void an_stage_hold_signals(sigset_t *before)
{
    sigset_t held;
    ending_signals(&held);
    sigaddset(&held, SIGCHLD);
    sigprocmask(SIG_BLOCK, &held, before);
}

/* Wait for a child or for a signal that ends this program: it ends the child too, and stays pending. */
static pid_t wait_or_end(pid_t child, int *state)
{
    sigset_t awaited;
    ending_signals(&awaited);
    sigaddset(&awaited, SIGCHLD);
    for (;;) {
        pid_t ended = waitpid(child, state, WNOHANG);
        int caught = ended == 0 ? sigwaitinfo(&awaited, NULL) : 0;
        if (ended != 0)
            return ended;
        if (caught <= 0 || caught == SIGCHLD)
            continue;
        kill(child, SIGTERM);
        ended = waitpid(child, state, 0);
        raise(caught);
        return ended;
    }
}

static an_status check_interrupted(an_error *err)
{
    sigset_t pending, ending;
    ending_signals(&ending);
    sigpending(&pending);
    for (int i = 1; i < NSIG; i++)
        if (sigismember(&ending, i) == 1 && sigismember(&pending, i) == 1)
            return an_fail(err, AN_E_IO, NULL, "ended by signal %d; nothing of this dump is left behind", i);
    return AN_OK;
}

static an_status wait_for(pid_t child, const char *name, an_stage_end *end, an_error *err)
{
    int state;
    if (wait_or_end(child, &state) < 0)
        return an_fail(err, AN_E_IO, name, "cannot be waited for: %s", strerror(errno));
    AN_TRY(check_interrupted(err));
    end->exit_code = WIFEXITED(state) ? WEXITSTATUS(state) : 128 + WTERMSIG(state);
    return AN_OK;
}

/* A stage starts with no signal blocked. */
static int start(const char *path, const posix_spawn_file_actions_t *actions, const char *const *arguments,
                 pid_t *child)
{
    posix_spawnattr_t how;
    sigset_t none;
    int failed = posix_spawnattr_init(&how);
    if (failed)
        return failed;
    sigemptyset(&none);
    posix_spawnattr_setsigmask(&how, &none);
    posix_spawnattr_setflags(&how, POSIX_SPAWN_SETSIGMASK);
    failed = posix_spawn(child, path, actions, &how, (char *const *)arguments, environ);
    posix_spawnattr_destroy(&how);
    return failed;
}

an_status an_stage_run(const char *folder, const char *const *arguments, an_stage_end *end, an_error *err)
{
    char path[PATH_MAX];
    posix_spawn_file_actions_t actions;
    pid_t child;
    *end = (an_stage_end){0};
    snprintf(path, sizeof path, "%s/%s", folder, arguments[0]);
    int said = memfd_create("said", MFD_CLOEXEC);
    if (said < 0)
        return an_fail(err, AN_E_IO, path, "cannot be started: %s", strerror(errno));
    int failed = prepare(&actions, said);
    if (!failed) {
        failed = start(path, &actions, arguments, &child);
        posix_spawn_file_actions_destroy(&actions);
    }
    an_status status = failed ? an_fail(err, AN_E_IO, path, "cannot be started: %s", strerror(failed))
                              : wait_for(child, path, end, err);
    if (status >= 0) {
        collect(said, end);
        if (end->exit_code >= 128 && !end->said[0])
            snprintf(end->said, sizeof end->said, "%s: ended by signal %d", arguments[0],
                     end->exit_code - 128);
    }
    close(said);
    return status;
}

void an_stage_reason(const an_stage_end *end, char *reason, size_t n_reason)
{
    const char *from = end->said;
    const char *colon = strstr(from, ": ");
    if (strncmp(from, "anelast-", 8) == 0 && colon)
        from = colon + 2;
    snprintf(reason, n_reason, "%.*s", (int)strcspn(from, "\n"), from);
}

/* Pipes carry raw samples in both directions, at once, and can be rewound when asked for. */
#include <fcntl.h>
#include <pthread.h>
#include <signal.h>
#include <stdatomic.h>
#include <time.h>

#include "samples.h"

enum { COUNT = 300000 };

/* A pipe in place of standard input or output, for the time of one test. */
typedef struct swap {
    int number; /* 0 or 1 */
    int kept;   /* the one before */
    int other;  /* the far end of the pipe */
} swap;

static swap swap_in(int number)
{
    int ends[2];
    swap made = {number, dup(number), -1};

    (void)fflush(stdout);
    assert_int_equal(pipe(ends), 0);
    assert_int_equal(dup2(ends[number], number), number);
    (void)close(ends[number]);
    made.other = ends[1 - number];
    return made;
}

static void swap_back(swap *made)
{
    assert_int_equal(dup2(made->kept, made->number), made->number);
    (void)close(made->kept);
}

typedef struct feed {
    int to;
    const unsigned char *bytes;
    size_t count, piece;
} feed;

static void *feed_pipe(void *user)
{
    const feed *job = user;

    for (size_t done = 0; done < job->count;) {
        size_t left = job->count - done;
        ssize_t made = write(job->to, job->bytes + done, left < job->piece ? left : job->piece);
        if (made <= 0) {
            break;
        }
        done += (size_t)made;
    }
    (void)close(job->to);
    return NULL;
}

static void a_pipe_of_odd_pieces_is_read_and_read_again(void **state)
{
    mb_cf32 *samples = make_samples(COUNT, 7), *back = mb_allocate(COUNT + 1, sizeof *back);
    mb_iq_open options = mb_iq_open_default();
    mb_iq_reader *reader = NULL;
    swap in = swap_in(0);
    feed job = {in.other, (const unsigned char *)samples, COUNT * sizeof *samples, 1237};
    pthread_t feeder;
    size_t got = 0;

    (void)state;
    options.format = MB_IQ_CF32;
    options.rate_hz = 48000.0;
    options.rewindable = true;
    assert_int_equal(pthread_create(&feeder, NULL, feed_pipe, &job), 0);
    assert_ok(mb_iq_reader_open("-", &options, &reader));
    assert_int_equal(mb_iq_reader_info(reader).samples, 0);
    assert_ok(mb_iq_read(reader, back, 1000, &got)); /* rewound in the middle, and again at the end */
    assert_int_equal(got, 1000);
    for (int pass = 0; pass < 2; pass++) {
        assert_ok(mb_iq_rewind(reader));
        memset(back, 0, COUNT * sizeof *back);
        assert_ok(mb_iq_read(reader, back, COUNT + 1, &got));
        assert_int_equal(got, COUNT);
        assert_memory_equal(back, samples, COUNT * sizeof *samples);
    }
    mb_iq_reader_close(reader);
    (void)pthread_join(feeder, NULL);
    swap_back(&in);
    mb_release(samples);
    mb_release(back);
}

static void without_asking_a_pipe_cannot_be_rewound(void **state)
{
    const int16_t samples[70000] = {1, 2, 3, 4};
    mb_iq_open options = mb_iq_open_default();
    mb_iq_reader *reader = NULL;
    mb_cf32 *out = mb_allocate(70000, sizeof *out);
    swap in = swap_in(0);
    feed job = {in.other, (const unsigned char *)samples, sizeof samples, 4096};
    pthread_t feeder;
    size_t got = 0;

    (void)state;
    options.format = MB_IQ_CI16;
    options.rate_hz = 48000.0;
    assert_int_equal(pthread_create(&feeder, NULL, feed_pipe, &job), 0);
    assert_ok(mb_iq_reader_open("-", &options, &reader));
    assert_ok(mb_iq_read(reader, out, 70000, &got));
    assert_int_equal(got, 35000);
    assert_int_equal(mb_iq_rewind(reader), MB_ERROR_UNSUPPORTED);
    mb_iq_reader_close(reader);
    (void)pthread_join(feeder, NULL);
    swap_back(&in);
    mb_release(out);
}

static void a_pipe_cut_in_a_sample_gives_the_whole_ones_first(void **state)
{
    const unsigned char bytes[11] = {1, 0, 2, 0, 3, 0, 4, 0, 5, 0, 6};
    mb_iq_open options = mb_iq_open_default();
    mb_iq_reader *reader = NULL;
    mb_cf32 out[2];
    swap in = swap_in(0);
    feed job = {in.other, bytes, sizeof bytes, 64};
    size_t got = 0;

    (void)state;
    options.format = MB_IQ_CI16;
    options.rate_hz = 48000.0;
    (void)feed_pipe(&job);
    assert_ok(mb_iq_reader_open("-", &options, &reader));
    assert_ok(mb_iq_read(reader, out, 2, &got));
    assert_int_equal(got, 2);
    assert_fault(mb_iq_read(reader, out, 2, &got), MB_ERROR_FORMAT, "standard input");
    assert_string_equal(
        mb_last_fault()->text,
        "standard input holds 11 bytes, no multiple of the 4 of a ci16 sample: it is truncated or of "
        "another format; copy it again or cut the last 3 bytes off");
    mb_iq_reader_close(reader);
    swap_back(&in);
}

static void a_sound_file_in_a_raw_pipe_is_noticed(void **state)
{
    static const char bytes[] = "RIFF\x24\x00\x00\x00WAVEfmt \x10\x00\x00\x00";
    mb_audio_open options = mb_audio_open_default();
    mb_audio_reader *reader = NULL;
    float out[2];
    swap in = swap_in(0);
    feed job = {in.other, (const unsigned char *)bytes, 20, 64};
    size_t got = 0;

    (void)state;
    options.format = MB_AUDIO_S16;
    options.rate_hz = 8000.0;
    (void)feed_pipe(&job);
    assert_ok(mb_audio_reader_open("-", &options, &reader));
    assert_fault(mb_audio_read(reader, out, 2, &got), MB_ERROR_FORMAT, "standard input");
    mb_audio_reader_close(reader);
    swap_back(&in);
}

static void what_is_written_comes_out_at_once(void **state)
{
    const mb_cf32 samples[2] = {{0.5f, -0.5f}, {0.25f, 1.5f}};
    const int16_t expected[] = {16384, -16384, 8192, 32767};
    int16_t back[8];
    mb_iq_writer_settings settings = mb_iq_writer_settings_default();
    mb_iq_writer *writer = NULL;
    swap out = swap_in(1);

    (void)state;
    settings.rate_hz = 48000.0;
    settings.format = MB_IQ_CI16;
    mb_status status = mb_iq_writer_create("-", &settings, &writer);
    status = status == MB_OK ? mb_iq_writer_write(writer, samples, 2) : status;
    ssize_t count = read(out.other, back, sizeof back); /* before it is committed */
    swap_back(&out);
    assert_ok(status);
    assert_int_equal(count, sizeof expected);
    assert_memory_equal(back, expected, sizeof expected);
    assert_ok(mb_iq_writer_commit(writer));
    mb_iq_writer_destroy(writer);
    (void)close(out.other);
}

static void audio_goes_through_a_pipe(void **state)
{
    const float samples[3] = {0.5f, -1.0f, 2.0f};
    float back[4];
    mb_audio_writer_settings settings = mb_audio_writer_settings_default();
    mb_audio_writer *writer = NULL;
    mb_audio_open options = mb_audio_open_default();
    mb_audio_reader *reader = NULL;
    size_t got = 0;
    swap out = swap_in(1);

    (void)state;
    settings.format = MB_AUDIO_F32;
    settings.rate_hz = 16000.0;
    mb_status status = mb_audio_writer_create("-", &settings, &writer);
    status = status == MB_OK ? mb_audio_writer_write(writer, samples, 3) : status;
    swap_back(&out);
    assert_ok(status);
    mb_audio_writer_destroy(writer);

    int kept = dup(0);
    assert_int_equal(dup2(out.other, 0), 0);
    options.format = MB_AUDIO_F32;
    options.rate_hz = 16000.0;
    assert_ok(mb_audio_reader_open("-", &options, &reader));
    assert_ok(mb_audio_read(reader, back, 3, &got));
    assert_int_equal(got, 3);
    assert_memory_equal(back, samples, sizeof samples);
    assert_near(mb_audio_reader_state_of(reader).peak, 2.0, 0.0);
    mb_audio_reader_close(reader);
    assert_int_equal(dup2(kept, 0), 0);
    (void)close(kept);
    (void)close(out.other);
}

static void a_file_as_standard_input_knows_its_length(void **state)
{
    const int8_t bytes[] = {1, 2, 3, 4, 5, 6};
    const char *path = path_of("pipe", "in.ci8");
    mb_iq_open options = mb_iq_open_default();
    mb_iq_reader *reader = NULL;
    int kept = dup(0);

    (void)state;
    put_file(path, bytes, sizeof bytes);
    int file = open(path, O_RDONLY);
    assert_int_equal(dup2(file, 0), 0);
    (void)close(file);
    options.format = MB_IQ_CI8;
    options.rate_hz = 8000.0;
    assert_ok(mb_iq_reader_open("-", &options, &reader));
    assert_int_equal(mb_iq_reader_info(reader).samples, 3);
    assert_ok(mb_iq_rewind(reader));
    mb_iq_reader_close(reader);
    assert_int_equal(dup2(kept, 0), 0);
    (void)close(kept);
}

static atomic_bool interrupted;

static void ignore(int number)
{
    (void)number;
}

typedef struct disturb {
    pthread_t reader;
    feed first, second;
} disturb;

/* Sends part of a sample, then signals until the reader has noticed one, then the rest. */
static void *disturb_reader(void *user)
{
    disturb *job = user;

    (void)!write(job->first.to, job->first.bytes, job->first.count);
    while (!atomic_load(&interrupted)) {
        (void)pthread_kill(job->reader, SIGUSR1);
        (void)nanosleep(&(struct timespec){.tv_nsec = 1000000}, NULL);
    }
    return feed_pipe(&job->second);
}

static void a_signal_breaks_a_read_off_and_loses_nothing(void **state)
{
    mb_cf32 samples[4] = {{0.1f, 0.2f}, {0.3f, 0.4f}, {0.5f, 0.6f}, {0.7f, 0.8f}}, back[5];
    const unsigned char *bytes = (const unsigned char *)samples;
    struct sigaction action = {.sa_handler = ignore};
    mb_iq_open options = {.format = MB_IQ_CF32, .rate_hz = 48000.0};
    mb_iq_reader *reader = NULL;
    swap in = swap_in(0);
    disturb job = {
        pthread_self(), {in.other, bytes, 19, 19}, {in.other, bytes + 19, sizeof samples - 19, 64}};
    pthread_t thread;
    size_t done = 0, got = 0;
    mb_status status = MB_OK;

    (void)state;
    assert_int_equal(sigaction(SIGUSR1, &action, NULL), 0);
    assert_ok(mb_iq_reader_open("-", &options, &reader));
    assert_int_equal(pthread_create(&thread, NULL, disturb_reader, &job), 0);
    do {
        status = mb_iq_read(reader, back + done, 5 - done, &got);
        done += got;
        if (status == MB_ERROR_INTERRUPTED) {
            atomic_store(&interrupted, true);
        }
    } while (status == MB_ERROR_INTERRUPTED || (status == MB_OK && got > 0 && done < 5));
    assert_ok(status);
    assert_true(atomic_load(&interrupted));
    assert_int_equal(done, 4);
    assert_memory_equal(back, samples, sizeof samples);
    (void)pthread_join(thread, NULL);
    mb_iq_reader_close(reader);
    swap_back(&in);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_pipe_of_odd_pieces_is_read_and_read_again),
        cmocka_unit_test(without_asking_a_pipe_cannot_be_rewound),
        cmocka_unit_test(a_pipe_cut_in_a_sample_gives_the_whole_ones_first),
        cmocka_unit_test(a_sound_file_in_a_raw_pipe_is_noticed),
        cmocka_unit_test(what_is_written_comes_out_at_once),
        cmocka_unit_test(audio_goes_through_a_pipe),
        cmocka_unit_test(a_file_as_standard_input_knows_its_length),
        cmocka_unit_test(a_signal_breaks_a_read_off_and_loses_nothing),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}

#include "program.h"

#include <fcntl.h>
#include <gtest/gtest.h>
#include <signal.h>
#include <spawn.h>
#include <sys/wait.h>
#include <unistd.h>

#include <array>
#include <fstream>
#include <sstream>
#include <stdexcept>

extern char** environ;

namespace wavefount {
namespace {

namespace fs = std::filesystem;

int spawn(const std::vector<std::string>& words, const fs::path& output) {
  std::vector<std::string> all = {WAVEFOUNT_PROGRAM};
  all.insert(all.end(), words.begin(), words.end());
  std::vector<char*> arguments;
  for (auto& word : all) arguments.push_back(word.data());
  arguments.push_back(nullptr);
  posix_spawn_file_actions_t actions;
  posix_spawn_file_actions_init(&actions);
  posix_spawn_file_actions_addopen(&actions, STDOUT_FILENO, output.c_str(),
                                   O_WRONLY | O_CREAT | O_TRUNC, 0600);
  posix_spawn_file_actions_adddup2(&actions, STDOUT_FILENO, STDERR_FILENO);
  pid_t process = -1;
  const int fault =
      posix_spawn(&process, WAVEFOUNT_PROGRAM, &actions, nullptr, arguments.data(), environ);
  posix_spawn_file_actions_destroy(&actions);
  if (fault != 0) throw std::runtime_error("the program cannot be started: " WAVEFOUNT_PROGRAM);
  return process;
}

int status_of(int wait_status) {
  return WIFSIGNALED(wait_status) ? 128 + WTERMSIG(wait_status) : WEXITSTATUS(wait_status);
}

std::string test_name() {
  const auto* info = testing::UnitTest::GetInstance()->current_test_info();
  if (info == nullptr) return "suite" + std::to_string(getpid());  // set up for a whole suite
  return std::string(info->test_suite_name()) + "." + info->name();
}

}  // namespace

Outcome run_program(const std::vector<std::string>& words) {
  const auto output = fs::path(testing::TempDir()) / (test_name() + ".output");
  const int process = spawn(words, output);
  int wait_status = 0;
  waitpid(process, &wait_status, 0);
  return {status_of(wait_status), text_of(output)};
}

RunningProgram::RunningProgram(const std::vector<std::string>& words)
    : process_(spawn(words, "/dev/null")) {}

RunningProgram::~RunningProgram() {
  if (!running()) return;
  signal(SIGKILL);
  wait();
}

void RunningProgram::signal(int number) const {
  ::kill(process_, number);
}

bool RunningProgram::running() {
  if (status_ >= 0) return false;
  int wait_status = 0;
  if (waitpid(process_, &wait_status, WNOHANG) == 0) return true;
  status_ = status_of(wait_status);
  return false;
}

int RunningProgram::wait() {
  if (status_ >= 0) return status_;
  int wait_status = 0;
  waitpid(process_, &wait_status, 0);
  status_ = status_of(wait_status);
  return status_;
}

fs::path test_folder() {
  auto folder = fs::path(testing::TempDir()) / "wavefount_end_to_end" / test_name();
  fs::remove_all(folder);
  fs::create_directories(folder);
  return folder;
}

fs::path shipped_pipeline(const std::string& name) {
  return fs::path(WAVEFOUNT_PIPELINES) / (name + ".yaml");
}

std::string text_of(const fs::path& file) {
  std::ifstream in(file, std::ios::binary);
  std::ostringstream text;
  text << in.rdbuf();
  return text.str();
}

}  // namespace wavefount

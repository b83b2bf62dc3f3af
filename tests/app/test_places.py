from gainbench_app.places import config_folder, state_folder


def test_they_are_the_users_own_folders(users_folders):
    assert config_folder() == users_folders / "config_home" / "gainbench"
    assert state_folder() == users_folders / "state_home" / "gainbench"
